"""The sheet of budgets: one row a budget; its lines stand on a sheet of their own."""

from __future__ import annotations

import re

from specflow.importers.sheets.declared_values import unit_cell
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.parameters import known_parameter
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.model.base import code_key
from specflow.model.budget import Budget, Correlation, Law, Reserve
from specflow.model.conditions import ConditionsSet
from specflow.model.parameter import Parameter, QuantityIdentity
from specflow.model.requirement import Requirement
from specflow.model.sheet import SheetColumn, SheetLayout
from specflow.units import convert, format_unit, parse_number, parse_quantity, parse_unit, tolerance_unit

_SUMS = ("coherent", "non-coherent")
_CORRELATION = re.compile(
    r"^(?P<first>[^,;:]+?)\s*(?:,|and)\s*(?P<second>[^,;:]+?)\s*[:=]\s*(?P<coefficient>[+-]?[\d.,]+)$"
)
_RESERVE = re.compile(r"^(?:(?P<parameter>[^:]+?)\s*:\s*)?(?P<amount>.+)$")

LAYOUT = SheetLayout(
    noun="budget",
    title="Budgets",
    aliases=("System budgets", "RF budgets"),
    intro=(
        "Chains and sums that serve requirements: one row a budget. What each block contributes stands on the sheet "
        "Budget lines."
    ),
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Budget ID",),
            required=True,
            guidance="Short code.",
            example="B-TX",
        ),
        SheetColumn(key="title", title="Title", aliases=("Name",), example="EIRP of the panel", width=26),
        SheetColumn(
            key="requirements",
            title="Requirements",
            aliases=("Serves", "Requirement"),
            required=True,
            guidance="IDs of the requirements it serves; their limits are what it is held against.",
            example="TX-EIRP-1",
            width=22,
        ),
        SheetColumn(
            key="parameter",
            title="Quantity",
            aliases=("Parameter",),
            field="quantity",
            guidance="What it is a budget of. Empty: the quantity of the first requirement.",
            example="eirp",
        ),
        SheetColumn(
            key="law",
            title="Law",
            aliases=("Combination",),
            required=True,
            guidance="cascade, sum (of gains and losses), power sum, voltage sum, root sum of squares.",
            choices=tuple(Law),
            example="cascade",
            width=18,
        ),
        SheetColumn(
            key="conditions",
            title="Conditions",
            aliases=("Conditions set",),
            guidance="ID of the set it is evaluated over. Empty: that of its requirements.",
            example="CS-TX-FULL",
        ),
        SheetColumn(
            key="intermodulation",
            title="Distortion adds",
            aliases=("Intermodulation",),
            guidance="Empty: coherent, the worst case of phase.",
            choices=_SUMS,
            example="coherent",
        ),
        SheetColumn(
            key="input_level",
            title="Input level",
            guidance="Level that drives the chain, with unit.",
            example="-2 dBm",
        ),
        SheetColumn(
            key="noise_source",
            title="Noise source",
            aliases=("Source temperature",),
            guidance="Noise temperature of what feeds the chain, in K. Empty: 290 K, or an antenna line.",
        ),
        SheetColumn(
            key="bandwidth",
            title="Noise bandwidth",
            field="bandwidth_hz",
            guidance="With unit; neither channel spacing nor 3 dB width.",
        ),
        SheetColumn(
            key="channel_spacing",
            title="Channel spacing",
            field="channel_spacing_hz",
            guidance="Of the adjacent channel, with unit. For leakage; the bandwidth is then the occupied width.",
        ),
        SheetColumn(key="plane_in", title="Input plane", aliases=("From plane",)),
        SheetColumn(key="plane_out", title="Output plane", aliases=("To plane",)),
        SheetColumn(
            key="reserve",
            title="Reserve",
            field="reserves",
            guidance="Kept back from the margin: 0.2 dB, or noise_figure: 0.2 dB; gain: 1 dB.",
            example="0.2 dB",
        ),
        SheetColumn(
            key="reserve_holder",
            title="Reserve held by",
            aliases=("Reserve holder",),
            field="reserves",
            guidance="Who may give it out.",
            example="Systems",
        ),
        SheetColumn(
            key="correlations",
            title="Correlations",
            guidance="Between correlation groups of lines: heat, supply: 0.5. Within a group it is 1.",
        ),
        SheetColumn(key="note", title="Note", aliases=("Notes", "Remarks", "Comment"), width=24),
    ),
)


def build(row: SheetRow, intake: Intake) -> Budget | None:
    """Make one budget of one row; its lines come from their own sheet, or stay as the project has them."""
    requirements = intake.references(row, "requirements", Requirement)
    if not requirements:
        row.needed("requirements")
    quantity = _quantity(row, intake, requirements)
    law = row.choice("law", Law, Law.CASCADE) if row.needed("law") else Law.CASCADE
    conditions = intake.reference(row, "conditions", ConditionsSet)
    level = unit_cell(row, "input_level")
    reserves = _reserves(row, intake, quantity)
    correlations = tuple(filter(None, (_correlation(row, one) for one in _parts(row.text("correlations")))))
    if quantity is None:
        return None
    before = intake.snapshot.find(Budget, row.subject)
    # Lines that the project has stay until the sheet of lines says otherwise, and correlations name their groups.
    return row.build(
        Budget,
        id=row.subject,
        title=row.prose("title"),
        requirements=requirements,
        quantity=quantity,
        law=law,
        intermodulation=row.one_of("intermodulation", _SUMS, "coherent"),
        plane_in=row.text("plane_in"),
        plane_out=row.text("plane_out"),
        conditions=conditions,
        input_level=None if level is None else float(level.value),
        input_level_unit="dBm" if level is None else format_unit(level.unit),
        noise_source=_in(row, "noise_source", "K", "a temperature below 0 K"),
        bandwidth_hz=_in(row, "bandwidth", "Hz", "no bandwidth: one is above 0 Hz", is_above=True),
        channel_spacing_hz=_in(row, "channel_spacing", "Hz", "no spacing: one is above 0 Hz", is_above=True),
        positions=before.positions if before else (),
        lines=before.lines if before else (),
        correlations=correlations,
        reserves=reserves,
        note=row.prose("note"),
        origin=row.origin("id"),
    )


def _quantity(row: SheetRow, intake: Intake, requirements: tuple[str, ...]) -> QuantityIdentity | None:
    if row.text("parameter"):
        named = known_parameter(row, "parameter", intake)
        if named is None:
            return None
        return QuantityIdentity(parameter=named.parameter.key, plane=named.plane, statistic=named.statistic)
    first = intake.find(Requirement, requirements[0]) if requirements else None
    return None if first is None else first.quantity


def _in(row: SheetRow, column: str, unit: str, wrong: str, *, is_above: bool = False) -> float | None:
    """Read a cell in a unit; what is below 0 (or at it, ``is_above``) is refused as ``wrong``."""
    quantity = unit_cell(row, column)
    if quantity is None:
        return None
    value = row.attempt(column, lambda: convert(float(quantity.value), quantity.unit, parse_unit(unit)))
    if value is None:
        return None
    if value < 0 or (is_above and value == 0):
        row.fault(column, f"{row.text(column)!r} is {wrong}", "correct the sign, the number or the unit")
        return None
    return float(value)


def _parts(text: str) -> list[str]:
    return [part.strip() for part in text.replace("\n", ";").split(";") if part.strip()]


def _reserves(row: SheetRow, intake: Intake, quantity: QuantityIdentity | None) -> tuple[Reserve, ...]:
    parts = _parts(row.text("reserve"))
    holder = row.prose("reserve_holder")
    if parts and not holder:
        row.fault("reserve_holder", "the reserve has no holder", "name who may give it out")
    if not parts or quantity is None:
        return ()
    return tuple(filter(None, (_reserve(row, intake, quantity, part, holder) for part in parts)))


def _reserve(
    row: SheetRow, intake: Intake, quantity: QuantityIdentity, text: str, holder: str
) -> Reserve | None:
    found = _RESERVE.match(text)
    assert found is not None  # some text is there
    name = found["parameter"] or quantity.parameter
    matched = intake.dictionary.match(name)
    if len(matched) != 1:
        row.fault("reserve", f"{name!r} is no parameter", "write noise_figure: 0.2 dB")
        return None
    parameter: Parameter = matched[0].parameter
    amount = row.attempt("reserve", lambda: parse_quantity(found["amount"]))
    if amount is None:
        return None
    wanted = tolerance_unit(parse_unit(parameter.unit))
    value = row.attempt(
        "reserve", lambda: convert(float(amount.value), amount.unit, wanted, difference=True), said=text
    )
    if value is None or not row.sound:
        return None
    if value < 0:
        row.fault(
            "reserve",
            f"{text!r} keeps nothing back: a reserve is a positive amount",
            "write how much of the margin is kept back, such as 0.2 dB",
        )
        return None
    return row.attempt(
        "reserve",
        lambda: Reserve(
            parameter=parameter.key, amount=float(value), unit=format_unit(wanted), holder=holder
        ),
    )


def _correlation(row: SheetRow, text: str) -> Correlation | None:
    found = _CORRELATION.match(text)
    if found is None:
        row.fault(
            "correlations",
            f"{text!r} is no correlation",
            "write two groups and a coefficient: heat, supply: 0.5",
        )
        return None
    coefficient = row.attempt("correlations", lambda: parse_number(found["coefficient"]))
    if coefficient is None:
        return None
    if not -1 <= coefficient <= 1:
        row.fault(
            "correlations",
            f"{coefficient:g} is no correlation coefficient: one lies from -1 to 1",
            "write 0.5 for 50 %; 1 moves both groups together, 0 leaves them independent",
        )
        return None
    first, second = found["first"].strip(), found["second"].strip()
    if code_key(first) == code_key(second):
        row.fault(
            "correlations",
            f"the lines of the group {first} are fully correlated as they are",
            "name two groups",
        )
        return None
    return Correlation(first=first, second=second, coefficient=coefficient)


SHEET = Sheet(LAYOUT, Budget, each_row(build))
