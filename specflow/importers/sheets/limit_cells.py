"""A cell that holds a limit: read, and checked against its parameter."""

from __future__ import annotations

import re

from specflow.conditions import find_dimension
from specflow.errors import ExpressionError
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.limits import alternatives, limit_inputs, parse_limit
from specflow.model.declared import DeclaredValue
from specflow.model.limit import Limit, Population
from specflow.model.parameter import Better, Parameter
from specflow.parameters import suits
from specflow.units import ONE, Unit, parse_unit

#: Parameters of one matter that share no word.
_OTHER_WAYS = {"vswr": "return_loss", "return_loss": "vswr"}
_NO_NUMBERS = frozenset({"nan", "inf", "infinity"})


def limit_cell(
    row: SheetRow, intake: Intake, column: str, parameter: Parameter | None, *, hint: str = "", text: str = ""
) -> Limit | None:
    """Return the limit of a cell; None where it is empty or refused, or where its parameter is not known.

    ``text`` is what the cell is taken to say, where that is more than what stands in it (">= 45" in a column of least
    values). ``hint`` is the unit of a bare number, which else may stand in the header; without either a bare number
    is refused, unless the parameter is a plain number.
    """
    text = text or row.needed(column)
    named = row.attempt("unit", lambda: parse_unit(hint)) if hint else None
    if hint and named is None:
        return None
    hint = hint or row.units.get(column, "")
    if parameter is None:
        if text:
            _check_grammar(row, column, text, hint)
        return None
    if not hint and parse_unit(parameter.unit) == ONE:
        hint = parameter.unit
    limit = (
        row.attempt(column, lambda: parse_limit(text, unit_hint=hint, parameter=parameter), said=text)
        if text
        else None
    )
    if limit is None or _lacks_number(row, column, limit, intake):
        return None
    if not hint and _lacks_unit(row, column, text, limit, parameter, intake):
        return None
    _check_kind(row, column, limit, parameter, intake)
    if named is not None:
        _check_unit_column(row, column, limit, named)
    return _with_unit_in_text(limit, hint, parameter)


def _with_unit_in_text(limit: Limit, hint: str, parameter: Parameter) -> Limit:
    """The limit with the unit of its column in its text, where that reads the same: "1.2" alone says nothing."""
    if not hint or parse_unit(hint) == ONE or _is_read(limit.text, parameter.model_copy(update={"unit": ""})):
        return limit
    text = f"{limit.text} {hint}"
    return limit.model_copy(update={"text": text}) if _is_read(text, parameter, like=limit) else limit


def _is_read(text: str, parameter: Parameter, *, like: Limit | None = None) -> bool:
    try:
        limit = parse_limit(text, parameter=parameter)
    except ExpressionError:
        return False
    return like is None or limit.tree == like.tree


def _check_grammar(row: SheetRow, column: str, text: str, hint: str) -> None:
    """Where the parameter is not known: find the mistakes in the limit that no parameter would mend."""
    name = row.text("parameter") or "unknown"
    unknown = Parameter(key=name[:80], title="", group="", unit=hint or "1", better=Better.HIGHER)
    row.attempt(column, lambda: parse_limit(text, unit_hint=hint, parameter=unknown), said=text)


def _lacks_number(row: SheetRow, column: str, limit: Limit, intake: Intake) -> bool:
    """Whether a unit or "NaN" was read as a name, because the number before it is missing."""
    declared = {value.name for value in intake.all(DeclaredValue)}
    for name in limit_inputs(limit) - declared:
        if name == limit.unit or name.casefold() in _NO_NUMBERS:
            row.fault(
                column, f"{name} stands where the limit {limit.text!r} needs a number", "write the number"
            )
            return True
    return False


def _lacks_unit(
    row: SheetRow, column: str, text: str, limit: Limit, parameter: Parameter, intake: Intake
) -> bool:
    """Whether the text reads only because the parameter lends its unit, which would be a guess.

    A declared value brings a unit of its own, so "P_rated ± 3.4 dB" lacks none.
    """
    units = {value.name: value.unit for value in intake.all(DeclaredValue)}
    for name in limit_inputs(limit):
        if find_dimension(name) is None:
            unit = units.get(name, parameter.unit)
            named = f"{name}[{'plain' if unit in ('', '1') else unit}]"
            text = re.sub(rf"\b{re.escape(name)}\b(?!\[)", named, text)
    if not _is_read(text, parameter.model_copy(update={"unit": ""})):
        row.fault(
            column,
            f"the limit {limit.text!r} has no unit",
            "write it after the number, as in '45 dBm'; 1 for a plain number",
            rule="workbook-no-unit",
        )
        return True
    return False


def _check_unit_column(row: SheetRow, column: str, limit: Limit, named: Unit) -> None:
    """Refuse a limit that brings another unit than the unit column says: either may be the slip."""
    if limit.unit and parse_unit(limit.unit) != named:
        row.fault(
            "unit",
            f"the unit column says {row.text('unit')}, but the limit {row.text(column)!r} is in {limit.unit}",
            "write the unit once, in the limit or in this column, or the same in both",
            rule="workbook-unit-conflict",
        )


def _check_kind(row: SheetRow, column: str, limit: Limit, parameter: Parameter, intake: Intake) -> None:
    """Refuse a limit whose unit cannot be one of its parameter.

    Of alternatives, one member of its kind is enough; a limit on a formula of several readings has a unit of its own.
    """
    if isinstance(limit.tree, Population) and limit.tree.of is not None:
        return
    own = [limit.unit] if limit.unit else [one.limit.unit for one in alternatives(limit) if not one.quantity]
    units = [unit for unit in own if unit]
    if units and not any(suits(parameter, unit) for unit in units):
        kin = [one for one in _kin(parameter, intake) if any(suits(one, unit) for unit in units)]
        meant = f": {', '.join(f'{one.key} ({one.unit})' for one in kin[:3])}" if kin else ""
        plain = parameter.unit == ONE.symbol
        row.fault(
            column,
            f"the limit is in {' and '.join(units)}, but {parameter.title} ({parameter.key}) is "
            + ("a plain number" if plain else f"in {parameter.unit}"),
            f"write the limit {'as a plain number' if plain else f'in a unit such as {parameter.unit}'}, "
            f"or name the parameter that is meant{meant}",
            rule="workbook-unit-kind",
        )


def _kin(parameter: Parameter, intake: Intake) -> list[Parameter]:
    """The parameters that say the same matter in another way: noise figure and temperature, spurious and its ratio."""
    other = _OTHER_WAYS.get(parameter.key)
    return [
        one
        for key, one in intake.dictionary.by_key.items()
        if key == other or (key != parameter.key and _stem(key) == _stem(parameter.key))
    ]


def _stem(key: str) -> str:
    return key.partition("_")[0].removesuffix("s")
