"""The sheet of requirements: one limit a row, typed as engineers write it."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.errors import UnitError
from specflow.importers.sheets.decision_rules import decision_rule, provers, stated_tolerance
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.limit_cells import limit_cell
from specflow.importers.sheets.limit_doubts import note_doubts
from specflow.importers.sheets.limit_names import check_names, names_words
from specflow.importers.sheets.parameters import known_parameter
from specflow.importers.sheets.plans import note_plan, stated_plan
from specflow.importers.sheets.requirement_columns import LAYOUT
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import Sheet
from specflow.importers.sheets.spelling import near
from specflow.limits import limit_words, parse_condition
from specflow.limits.tree import states_bandwidth
from specflow.model.base import MAX_CODE_LENGTH, code_key
from specflow.model.block import Block, Tier
from specflow.model.conditions import ConditionsSet
from specflow.model.limit import Limit, LimitState, MeasuredIn, TestTolerance
from specflow.model.parameter import Parameter, QuantityIdentity
from specflow.model.requirement import Obligation, OpenValue, Requirement, Source
from specflow.parameters import Candidate
from specflow.units import bandwidth_words, convert, parse_quantity, parse_unit

_ALWAYS = frozenset({"", "u", "always", "all", "unconditional"})
_NONE = frozenset({"none", "no conditions"})
_NOT_STATED = frozenset({"n/a", "n.a.", "na", "none", "no limit"})
_DEFAULT_TAKEN = "workbook-default-taken"


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Add one requirement a row, with the activities its shorthand columns plan."""
    for row in rows:
        plan = stated_plan(row)
        requirement = _requirement(row, intake)
        if requirement is None:
            continue
        intake.add(requirement, _stated(row, requirement))
        note_plan(plan, requirement, row, intake)
        parameter = intake.dictionary.get(requirement.quantity.parameter)
        words = limit_words(requirement.limit, parameter)
        intake.echo(requirement.id, words)
        intake.echo(requirement.id, names_words(requirement.limit, intake, requirement.conditions))


def _stated(row: SheetRow, requirement: Requirement) -> set[str]:
    """What the row states: its columns, the factor in the decision rule, and that a firm limit is not open."""
    stated = row.stated()
    if row.has("decision_rule"):
        stated.add("decision_rule.guard_factor")
    if requirement.limit.state is LimitState.FIRM:
        stated.add("open_value")
    return stated


def _requirement(row: SheetRow, intake: Intake) -> Requirement | None:
    named = known_parameter(row, "parameter", intake)
    parameter = named.parameter if named else None
    limit = _limit(row, intake, parameter)
    code = _block_code(row, intake)
    block = intake.find(Block, code)
    quantity = _quantity(row, intake, named, limit, block)
    parents, reason = _parents(row, intake)
    conditions = _conditions(row, intake)
    rule, who = decision_rule(row, intake, limit, parameter), provers(row, intake)
    tolerance = stated_tolerance(row)
    plain = _standing(row, limit, block) | _said(row)
    if limit is None or quantity is None:
        return None
    check_names(row, intake, _limit_column(row), limit, conditions)
    note_doubts(row, intake, _limit_column(row), limit, parameter, conditions)
    return row.build(
        Requirement,
        id=row.subject,
        title=row.prose("title") or (parameter.title if parameter else ""),
        block=code,
        quantity=quantity,
        limit=_with_tolerance(row, limit, tolerance, intake),
        parents=parents,
        derived_reason=reason,
        conditions=conditions,
        decision_rule=rule,
        provers=who,
        origin=row.origin(_limit_column(row)),
        **plain,
    )


def _said(row: SheetRow) -> dict[str, object]:
    """The fields that are free text."""
    source = Source(
        document=row.prose("source_document"),
        issue=row.prose("source_issue"),
        paragraph=row.prose("source_paragraph"),
    )
    kind = row.prose("kind") or "performance"
    return {"source": source, "kind": kind, **{name: row.prose(name) for name in _PROSE}}


def _standing(row: SheetRow, limit: Limit | None, block: Block | None) -> dict[str, object]:
    """The fields that say how the requirement stands: how binding, where, open or not, applicable or not."""
    _check_not_applicable(row)
    return {
        "tier": row.choice("tier", Tier, block.tier if block else Tier.SYSTEM),
        "obligation": row.choice("obligation", Obligation, Obligation.SHALL),
        "open_value": _open_value(row, limit),
        "applicability": _applicability(row),
        "met_by_lower_level": row.yes("met_by_lower_level", False),
        "needs_allocation": row.yes("needs_allocation", None),
    }


_PROSE = (
    "statement",
    "owner",
    "not_applicable_reason",
    "not_applicable_approver",
    "rationale",
    "assumptions",
    "priority",
    "note",
)


def _limit(row: SheetRow, intake: Intake, parameter: Parameter | None) -> Limit | None:
    """The limit as typed, or put together from a least and a greatest value in columns of their own."""
    column, hint = _limit_column(row), row.text("unit")
    least, greatest = row.text("minimum"), row.text("maximum")
    if column == "limit":
        if least or greatest:
            row.fault(column, "the limit is given, and a minimum or maximum too", "empty one of them")
        return limit_cell(row, intake, column, parameter, hint=hint)
    if not least and not greatest and column not in row.spoiled:
        row.fault(column, "no limit is given", "write the least or the greatest value")
    if column in row.spoiled:
        return None
    if least and greatest and _NOT_STATED & {least.casefold(), greatest.casefold()}:
        least, greatest = ("" if end.casefold() in _NOT_STATED else end for end in (least, greatest))
        text = _one_sided(">=", least) if least else _one_sided("<=", greatest) if greatest else "n/a"
    elif least and greatest:
        text = f"{least} to {greatest}"
    else:
        text = _one_sided(">=", least) if least else _one_sided("<=", greatest)
    return limit_cell(row, intake, column, parameter, hint=hint, text=text)


def _limit_column(row: SheetRow) -> str:
    """The column whose cell holds the limit of this row."""
    if row.text("limit") or "limit" in row.spoiled:
        return "limit"
    filled = [column for column in ("minimum", "maximum") if row.text(column)]
    present = [column for column in ("limit", "minimum", "maximum") if row.has(column)]
    return (filled or present)[0]


def _one_sided(sign: str, text: str) -> str:
    """A bound with its sign: ">= 45 dBm" for "45 dBm", "TBR >= 45 dBm" for "TBR 45 dBm", "TBD" for itself."""
    if text.upper().startswith("TBR"):
        return f"TBR {sign} {text[3:].strip()}"
    return text if text.upper().startswith("TBD") or text.startswith(sign) else f"{sign} {text}"


def _with_tolerance(row: SheetRow, limit: Limit, tolerance: TestTolerance | None, intake: Intake) -> Limit:
    """The limit with the test tolerance of its own column; without such a column it stays as the project has it."""
    known = intake.snapshot.find(Requirement, row.subject)
    if known is not None and not row.has("test_tolerance"):
        tolerance = known.limit.test_tolerance
    if tolerance is None or (limit.test_tolerance is not None and not row.has("test_tolerance")):
        return limit
    return limit.model_copy(update={"test_tolerance": tolerance})


def _block_code(row: SheetRow, intake: Intake) -> str | None:
    """The block that is named; the system where none is named and there is only one."""
    code = row.text("block")
    if code:
        return intake.link(row, "block", Block, code)
    roots = [block for block in intake.all(Block) if block.parent is None]
    if len(roots) != 1 or "block" in row.spoiled:
        row.fault("block", "no block is named", "write the id of the block that the limit is on")
        return None
    if row.has("block") or not intake.has_found(_DEFAULT_TAKEN):
        intake.note(
            row,
            "block",
            f"no block is named; {roots[0].id} ({roots[0].name}) was taken, the only block without a parent",
            "write the id of the block that the limit is on",
            rule=_DEFAULT_TAKEN,
        )
    return roots[0].id


def _quantity(
    row: SheetRow, intake: Intake, named: Candidate | None, limit: Limit | None, block: Block | None
) -> QuantityIdentity | None:
    """The quantity identity; a statistic or plane in the parameter's cell ("spurious (TRP)") counts as stated."""
    if named is None:
        return None
    parameter = named.parameter
    planes = (*(plane.name for plane in block.planes), *parameter.planes) if block else parameter.planes
    return QuantityIdentity(
        parameter=parameter.key,
        plane=_among(row, intake, "plane", planes) or named.plane,
        statistic=_among(row, intake, "statistic", parameter.statistics) or named.statistic,
        bandwidth_hz=_bandwidth(row, intake, parameter, limit),
        polarisation=row.text("polarisation"),
    )


def _among(row: SheetRow, intake: Intake, column: str, known: Sequence[str]) -> str:
    """The text of a cell, spelled as the dictionary or the block spells it; another word is doubtful, not wrong."""
    text = row.text(column)
    spelled = {code_key(one): one for one in known}.get(code_key(text))
    if text and known and spelled is None:
        intake.note(
            row,
            column,
            f"{row.layout.column(column).title} {text!r} is new here" + near(text, known),
            "only evidence with the same word will match; known: " + ", ".join(dict.fromkeys(known)),
            rule="workbook-unknown-word",
        )
    return spelled or text


def _bandwidth(row: SheetRow, intake: Intake, parameter: Parameter, limit: Limit | None) -> float | None:
    """The reference bandwidth in Hz: as stated, as the unit of the limit says, or as the limit is measured in."""
    stated = (
        row.attempt("bandwidth", lambda: _hertz(row.text("bandwidth"))) if row.text("bandwidth") else None
    )
    implied = None if limit is None else row.attempt("limit", lambda: _implied_bandwidth(limit))
    if stated is not None and implied is not None and abs(stated - implied) > 1e-9 * implied:
        row.fault(
            "bandwidth",
            f"the reference bandwidth is {row.text('bandwidth')}, but the limit {limit.text if limit else ''} "
            f"is per {bandwidth_words(implied)}",
            "state the same bandwidth in both, or leave this cell empty",
        )
    found = stated if stated is not None else implied
    if (
        found is None
        and parameter.needs_bandwidth
        and limit is not None
        and limit.state is not LimitState.TBD
        and not states_bandwidth(limit.tree)
    ):
        intake.note(
            row,
            "bandwidth" if row.has("bandwidth") else _limit_column(row),
            f"{parameter.title} means little without a reference bandwidth, and none is stated",
            "write it in the column Reference bandwidth, as 1 MHz, or in the unit of the limit, as dBm/MHz",
            rule="workbook-no-bandwidth",
        )
    return found


def _implied_bandwidth(limit: Limit) -> float | None:
    if limit.unit and (bandwidth := parse_unit(limit.unit).bandwidth_hz) is not None:
        return bandwidth
    if isinstance(limit.tree, MeasuredIn):
        return _hertz(f"{limit.tree.bandwidth.text} {limit.tree.bandwidth.unit}")
    return None


def _hertz(text: str) -> float:
    quantity = parse_quantity(text)
    hertz = float(convert(float(quantity.value), quantity.unit, parse_unit("Hz")))
    if not hertz > 0:
        raise UnitError(f"a bandwidth of {text} cannot be", hint="write a bandwidth greater than 0, as 1 MHz")
    return hertz


def _parents(row: SheetRow, intake: Intake) -> tuple[tuple[str, ...], str]:
    reason = row.prose("derived_reason")
    if code_key(row.text("parents")) == "derived":
        if not reason:
            row.fault("derived_reason", "a derived requirement needs its reason", "say why it is there")
        return (), reason
    return intake.references(row, "parents", Requirement), reason


def _conditions(row: SheetRow, intake: Intake) -> str | None:
    return (
        None
        if code_key(row.text("conditions")) in _NONE
        else intake.reference(row, "conditions", ConditionsSet)
    )


def _applicability(row: SheetRow) -> str:
    """Unconditional is ""; anything else is an expression over conditions and declared values, checked here."""
    text = row.text("applicability").removeprefix("C:").strip()
    if code_key(text) in _ALWAYS:
        return ""
    row.attempt("applicability", lambda: parse_condition(text))
    return text


def _check_not_applicable(row: SheetRow) -> None:
    if row.prose("not_applicable_reason") and not row.prose("not_applicable_approver"):
        row.fault(
            "not_applicable_approver",
            "a requirement is set not applicable, but nobody is named who approved that",
            "name the approver, or empty the reason",
        )


def _open_value(row: SheetRow, limit: Limit | None) -> OpenValue | None:
    value = OpenValue(owner=row.prose("tbr_owner"), due=row.date("tbr_due"), action=row.prose("tbr_action"))
    firm = limit is None or limit.state is LimitState.FIRM
    return None if firm and value == OpenValue() else value


def identify(row: SheetRow, intake: Intake) -> str:
    """The id; short enough for the ids of its activities."""
    code = row.needed("id")
    if len(code) > MAX_CODE_LENGTH - len("/A99"):
        row.fault(
            "id",
            f"the id {code[:20]}... is too long",
            f"use at most {MAX_CODE_LENGTH - len('/A99')} characters",
        )
    return code


SHEET = Sheet(LAYOUT, Requirement, read, identify)
