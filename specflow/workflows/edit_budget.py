"""Edit single lines of a budget: preview the change and what it does to the margins, then accept it as a revision."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from specflow.changes import diff
from specflow.errors import DocumentError, SpecflowError
from specflow.importers.sheets.line_values import CellContext, read_line_value
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine
from specflow.model.budget_line import ConditionTable, Constant, LineTolerance, WordTable
from specflow.model.budget_outcome import BudgetOutcome
from specflow.model.change import Change
from specflow.model.conditions import ConditionMap, ConditionsSet
from specflow.model.report import ReportTable
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.reports.budget import titles
from specflow.reports.budget_edit import margins_moved
from specflow.reports.budget_trail import value_words
from specflow.reports.figures import rounded
from specflow.store import ProjectStore
from specflow.units import convert, parse_number, parse_unit, split_quantity, tolerance_unit
from specflow.workflows.budget_lines import line_named
from specflow.workflows.budget_outcome import HowToCompute, budget_outcome
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.show_budget import budget_named

HOW_TO_SET = (
    "write POSITION PARAMETER = VALUE, such as '4 noise_figure = 1.7 dB ± 0.2 dB' or 'LNA gain = 24 dB'"
)


@dataclass(frozen=True, slots=True)
class EditPreview:
    """What accepting would change; ``before`` and ``after`` are what the budget comes to, nominal."""

    budget: Budget
    edited: Budget
    changes: Sequence[Change]
    before: BudgetOutcome
    after: BudgetOutcome
    moved: ReportTable


def preview_edit(store: ProjectStore, code: str, settings: Sequence[str], reason: str) -> EditPreview:
    """Return what the settings would change; nothing is stored.

    A setting names a line and its new value; what it does not say (tolerance, source, maturity) stays. SpecflowError
    for a setting that cannot be read, and where the edited budget cannot be evaluated.
    """
    snapshot = store.load()
    dictionary = project_dictionary(snapshot)
    budget = budget_named(snapshot, code)
    edited, said = budget, []
    for setting in settings:
        line, new = _set(edited, setting, snapshot, dictionary)
        lines = tuple(new if one is line else one for one in edited.lines)
        said.append(f"{line.place}: {value_words(line)} → {value_words(new)}{_step(line, new)}")
        edited = edited.model_copy(update={"lines": lines})
    how = HowToCompute(ways=())
    before, after = (budget_outcome(one, snapshot, dictionary, how) for one in (budget, edited))
    changes = [_told(change, said, reason) for change in diff(snapshot, [edited])]
    return EditPreview(
        budget, edited, changes, before, after, margins_moved(before, after, titles(dictionary))
    )


def accept_edit(store: ProjectStore, preview: EditPreview, *, by: str, reason: str) -> int:
    """Store the edit as a new revision of the budget; return the project revision.

    DocumentError without a reason, ConflictError when somebody changed the budget since the preview.
    """
    if not reason.strip():
        raise DocumentError("an edit of a budget needs a reason", hint="say why with --reason")
    return store.apply(preview.changes, by=by, reason=reason)


def _told(change: Change, said: Sequence[str], reason: str) -> Change:
    """Put the edited lines in words in place of the whole lists of lines."""
    fields = tuple(
        one.model_copy(update={"meaning": "; ".join(said)}) if one.field == "lines" else one
        for one in change.fields
    )
    return change.model_copy(update={"fields": fields, "reason": reason})


def _set(
    budget: Budget, setting: str, snapshot: Snapshot, dictionary: Dictionary
) -> tuple[BudgetLine, BudgetLine]:
    """Return the line that a setting names, and the same with its new value."""
    name, equals, text = setting.partition("=")
    if not equals or not name.strip() or not text.strip():
        raise SpecflowError(f"{setting!r} sets nothing", where=f"budget {budget.id}", hint=HOW_TO_SET)
    line = line_named(budget, name.strip(), dictionary)
    value_text, sign, tolerance_text = text.partition("±")
    found = read_line_value(value_text.strip(), _context(budget, line, snapshot))
    tolerance = line.tolerance
    if sign:
        tolerance = _tolerance(tolerance_text.strip(), found.unit, line)
    if tolerance is not None and tolerance_unit(parse_unit(found.unit)) != tolerance_unit(
        parse_unit(line.unit)
    ):
        raise DocumentError(
            f"the value is in {found.unit}, the tolerance of the line is in that of {line.unit}",
            where=f"budget {budget.id}, {line.place}",
            hint="write the value in the unit of the line, or state the tolerance too",
        )
    update = {"value": found.value, "unit": found.unit, "drifts": found.drifts, "tolerance": tolerance}
    return line, line.model_copy(update=update)


def _context(budget: Budget, line: BudgetLine, snapshot: Snapshot) -> CellContext:
    """Return what a value may leave unsaid: the line's unit, and the temperature and frequency that the block has."""
    maps = [one for one in snapshot.all(ConditionMap) if code_key(one.block or "") == code_key(line.block)]
    names = [entry.target for one in maps for entry in one.entries]
    conditions = snapshot.find(ConditionsSet, budget.conditions)
    stated = [one.name for one in conditions.dimensions] if conditions is not None else []

    def of(kind: str) -> tuple[str, ...]:
        own = tuple(name for name in names if kind in name)
        return own or tuple(name for name in stated if kind in name)

    return CellContext(line.unit, of("temperature"), of("frequency"))


def _tolerance(text: str, unit: str, line: BudgetLine) -> LineTolerance:
    """Return a tolerance of that amount; what it means stays as the line says."""
    number, written = split_quantity(text)
    wanted = tolerance_unit(parse_unit(unit))
    amount = parse_number(number)
    if written:
        amount = float(convert(amount, parse_unit(written), wanted, difference=True))
    known = line.tolerance
    if known is None:
        return LineTolerance(minus=amount, plus=amount)
    return LineTolerance(
        minus=amount, plus=amount, meaning=known.meaning, k=known.k, distribution=known.distribution
    )


def _step(old: BudgetLine, new: BudgetLine) -> str:
    """Say by how much a constant goes up or down; tables are told by their ends already."""
    if not isinstance(old.value, Constant) or not isinstance(new.value, Constant) or old.unit != new.unit:
        return ", another table" if isinstance(new.value, ConditionTable | WordTable) else ""
    step = new.value.value - old.value.value
    if step == 0:
        return ""
    unit = tolerance_unit(parse_unit(new.unit)).symbol
    return f", {'up' if step > 0 else 'down'} by {rounded(abs(step))} {unit}"
