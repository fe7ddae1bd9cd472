"""The sheet of the project itself: one setting a row, its name and its value."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence

from specflow.errors import UnitError
from specflow.importers.sheets.cells import CellFault, text_number
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet
from specflow.importers.sheets.spelling import near
from specflow.model.base import code_key
from specflow.model.finding import Severity
from specflow.model.project import Policy, Project
from specflow.model.sheet import SheetColumn, SheetLayout, header_key
from specflow.units import convert, format_value, parse_quantity, parse_unit

LAYOUT = SheetLayout(
    noun="project",
    title="Project",
    aliases=("Project settings", "Settings", "Policy"),
    intro="The project itself and the rules of the house: one setting a row. What is not in a row stays as it is.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="name",
            title="Name",
            aliases=("Setting", "Property"),
            required=True,
            guidance="Name, Description, Invented, Second review, Keep copies, Marginal threshold in dB, Marginal "
            "threshold relative, or Severity of and the code of a rule ('specflow rules' lists them), with at and the "
            "name of a review gate where it is to weigh otherwise there.",
            example="Name",
            width=30,
        ),
        SheetColumn(
            key="value",
            title="Value",
            required=True,
            guidance="A text, yes or no, a threshold as 0.5 dB or 5 %, or a severity: error, warning, info, off "
            "(default: as the rule has it).",
            example="Harbour terminal",
            width=40,
        ),
    ),
    more_examples=(
        {"mark": "example", "name": "Description", "value": "Ka-band terminal of a ferry"},
        {"mark": "example", "name": "Second review", "value": "no"},
        {"mark": "example", "name": "Keep copies", "value": "no"},
        {"mark": "example", "name": "Marginal threshold in dB", "value": "0.5 dB"},
        {"mark": "example", "name": "Marginal threshold relative", "value": "5 %"},
        {"mark": "example", "name": "Severity of no-credit", "value": "info"},
        {"mark": "example", "name": "Severity of tbd-left at CDR", "value": "error"},
    ),
)

OFF, DEFAULT = "off", "default"
_SEVERITY = re.compile(r"severity\s+(?:of\s+)?(?P<rule>\S.*?)(?:\s+at\s+(?P<gate>\S.*))?", re.IGNORECASE)

#: A setting read from its row: the project with it, and how it was understood.
Set = tuple[Project, str]


def _name(row: SheetRow, project: Project) -> Set | None:
    text = row.needed("value")
    return (project.model_copy(update={"name": text}), f"called {text}") if text else None


def _description(row: SheetRow, project: Project) -> Set | None:
    text = row.prose("value")
    return project.model_copy(
        update={"description": text}
    ), f"described as {text!r}" if text else "no description"


def _invented(row: SheetRow, project: Project) -> Set | None:
    said = _yes(row)
    words = "its data are invented" if said else "its data are real"
    return None if said is None else (project.model_copy(update={"invented": said}), words)


def _second_review(row: SheetRow, project: Project) -> Set | None:
    said = _yes(row)
    words = "evidence needs a second review" if said else "evidence needs no second review"
    return None if said is None else _with_policy(row, project, words, second_review=said)


def _keep_copies(row: SheetRow, project: Project) -> Set | None:
    said = _yes(row)
    words = "a copy of each attached file is kept" if said else "no copies of attached files are kept"
    return None if said is None else _with_policy(row, project, words, keep_copies=said)


def _marginal_db(row: SheetRow, project: Project) -> Set | None:
    value = _number(row, "dB")
    words = f"marginal within {format_value(value or 0.0)} dB of the limit"
    return None if value is None else _with_policy(row, project, words, marginal_db=value)


def _marginal_relative(row: SheetRow, project: Project) -> Set | None:
    value = _number(row, "1")
    words = f"marginal within {format_value(100 * (value or 0.0))} % of the limit, where it is not in dB"
    return None if value is None else _with_policy(row, project, words, marginal_relative=value)


#: Setting → how its row is read; in the order in which they are named to people.
SETTINGS: dict[str, Callable[[SheetRow, Project], Set | None]] = {
    "Name": _name,
    "Description": _description,
    "Invented": _invented,
    "Second review": _second_review,
    "Keep copies": _keep_copies,
    "Marginal threshold in dB": _marginal_db,
    "Marginal threshold relative": _marginal_relative,
}
_ALSO = {
    "Project name": "Name",
    "Project": "Name",
    "Marginal threshold dB": "Marginal threshold in dB",
    "Marginal dB": "Marginal threshold in dB",
    "Relative marginal threshold": "Marginal threshold relative",
    "Marginal relative": "Marginal threshold relative",
}
_BY_KEY = {header_key(one): one for one in SETTINGS} | {header_key(one): name for one, name in _ALSO.items()}


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Lay the settings over those that the project has; a row that cannot be read leaves its setting as it was."""
    before = _stored(intake)
    project, said = before, list[str]()
    seen: dict[str, SheetRow] = {}
    for row in rows:
        name = row.needed("name")
        found = _setting(row, name, project, seen) if name else None
        if found is not None and row.sound:
            project, words = found
            said.append(words)
    if said:
        intake.add(project, ("name", "description", "invented", "policy"))
        intake.echo(project.id, "; ".join(said))


def _stored(intake: Intake) -> Project:
    return next(iter(intake.snapshot.all(Project)), Project(name="project"))


def _setting(row: SheetRow, name: str, project: Project, seen: dict[str, SheetRow]) -> Set | None:
    """The project with the setting of one row; None where the row is refused."""
    severity = _SEVERITY.fullmatch(name.strip())
    known = _weighed(severity) if severity else _BY_KEY.get(header_key(name))
    if known is None:
        row.fault(
            "name",
            f"there is no setting {name!r}" + near(name, (*SETTINGS, "Severity of")),
            f"there are {', '.join(SETTINGS)}, and Severity of with the code of a rule",
        )
        return None
    first = seen.setdefault(known, row)
    if first is not row:
        row.fault(
            "name", f"{name} is set already in {first.origin('name').cell}", "delete one of the two rows"
        )
        return None
    if severity is None:
        return SETTINGS[known](row, project)
    return _severity(row, _rule(severity["rule"]), severity["gate"] or "", project)


def _weighed(severity: re.Match[str]) -> str:
    """The key of a row that says how a rule weighs: the same for every spelling of rule and gate."""
    return f"severity of {_rule(severity['rule'])} at {code_key(severity['gate'] or '')}"


def _rule(text: str) -> str:
    """The code of a rule as it is written: 'No credit' and 'no_credit' are no-credit."""
    return re.sub(r"[\s_]+", "-", text.strip()).casefold()


def _severity(row: SheetRow, rule: str, gate: str, project: Project) -> Set | None:
    """The policy with the severity of a rule, at a gate if one is named; whether there is such a rule the rules say."""
    text = row.needed("value")
    word = row.pick("value", text, (*reversed(Severity), OFF, DEFAULT)) if text else None
    if word is None:
        return None
    policy = project.policy
    spelt = next((one for one in policy.gates if code_key(one) == code_key(gate)), gate)
    before = policy.gates.get(spelt, {}) if gate else policy.severities
    wanted = {code: one for code, one in before.items() if code_key(code) != rule}
    where = f" at {spelt}" if gate else ""
    words = f"{rule} weighs{where} as {'elsewhere' if gate else 'the rule says'}"
    if word != DEFAULT:
        wanted |= {rule: word}
        words = f"{rule} is {'switched off' if word == OFF else f'of severity {word}'}{where}"
    if not gate:
        return _with_policy(row, project, words, severities=wanted)
    gates = {name: own for name, own in policy.gates.items() if name != spelt}
    return _with_policy(row, project, words, gates={**gates, spelt: wanted} if wanted else gates)


def _with_policy(row: SheetRow, project: Project, words: str, **fields: object) -> Set | None:
    policy = row.attempt("value", lambda: Policy.model_validate(project.policy.model_dump() | fields))
    return None if policy is None else (project.model_copy(update={"policy": policy}), words)


def _yes(row: SheetRow) -> bool | None:
    return row.yes("value", None) if row.needed("value") else None


def _number(row: SheetRow, unit: str) -> float | None:
    """The threshold in a unit, which may be left out; percent are one in a hundred."""
    text = row.needed("value")
    if not text:
        return None
    try:
        if re.search(r"[A-Za-z%]", re.sub(r"(?<=\d)[eE](?=[-+]?\d)", "", text)):
            quantity = parse_quantity(text)
            return float(convert(float(quantity.value), quantity.unit, parse_unit(unit)))
        return text_number(text, row.grid.decimal)
    except UnitError as error:
        row.fault("value", error.message, error.hint or _example(unit))
    except CellFault as fault:
        row.fault("value", fault.message, _example(unit))
    return None


def _example(unit: str) -> str:
    return "write a number of decibels, as 0.5 dB" if unit == "dB" else "write a share, as 5 % or 0.05"


def identify(row: SheetRow, intake: Intake) -> str:
    """All rows are of the one project."""
    return _stored(intake).id


SHEET = Sheet(LAYOUT, Project, read, identify, grouped=True, may_be_another=True)
