"""Changes as a person writes them, read into documents: a limit, a line, a tolerance or a position of a budget.

LNA-NF-1 limit <= 1.5 dB
RX LNA gain = 23 dB
RX position 2 gain = table frequency: 17.7 GHz 23.5; 20.2 GHz 24.5 dB linear
RX LNA gain tolerance = +0.5/-0.3 dB limits uniform
RX add FIL noise_figure = 2 dB   RX position 5 block = ATT
RX position 2 count = 4          RX FIL passive = no          RX position 2 removed
RX input level = -60 dBm         RX noise source = 50 K
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

from pydantic import ValidationError

from specflow.errors import DocumentError, SpecflowError
from specflow.importers.sheets.line_values import CellContext, read_line_value
from specflow.limits import limit_inputs, parse_limit
from specflow.model.base import Document, code_key
from specflow.model.budget import Budget, BudgetLine, BudgetPosition
from specflow.model.budget_line import Distribution, LineTolerance, Meaning
from specflow.model.conditions import ConditionsSet
from specflow.model.declared import DeclaredValue
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary, suits
from specflow.units import convert, parse_quantity, parse_unit, to_tolerance, tolerance_unit
from specflow.workflows.budget_lines import line_named, named_parts, parameter_keys

_SHAPES = (
    "write 'REQUIREMENT limit <= 1.5 dB', 'BUDGET BLOCK PARAMETER = 23 dB', "
    "'BUDGET BLOCK PARAMETER tolerance = 0.5 dB limits', 'BUDGET position 2 count = 4', 'BUDGET position 2 removed'"
)
_NUMBER = r"\d+(?:[.,]\d+)?|[.,]\d+"
_TOLERANCE = re.compile(
    rf"^(?:(?:±|\+/-|\+-)?\s*(?P<both>{_NUMBER})|\+\s*(?P<plus>{_NUMBER})\s*/?\s*-\s*(?P<minus>{_NUMBER}))"
    r"\s*(?P<unit>[^\s\d]+)?(?:\s+(?P<rest>.*))?$"
)
_SIGMA = re.compile(rf"(?P<k>{_NUMBER})\s*(?:sigma|σ)", re.IGNORECASE)
_POSITION = re.compile(
    r"^(?:position\s+)?(?P<place>\S+)\s+(?P<what>count|passive|removed|block)\s*(?:=\s*(?P<value>.+))?$",
    re.IGNORECASE,
)
_TEMPERATURES = ("temperature_baseplate", "temperature_case", "temperature_board", "temperature_ambient")


def changed_documents(texts: Sequence[str], snapshot: Snapshot, dictionary: Dictionary) -> list[Document]:
    """Return the documents that changes lead to, each with all its changes. SpecflowError names the text meant."""
    after: dict[tuple[type[Document], str], Document] = {}
    for text in texts:
        try:
            document = _changed(text, snapshot, dictionary, after)
        except ValidationError as error:
            message = str(error.errors()[0]["msg"]).removeprefix("Value error, ")
            raise DocumentError(message, where=text, hint=_SHAPES) from None
        except SpecflowError as error:
            if error.where and text not in error.where:
                error.where = f"{text}: {error.where}"
            error.where = error.where or text
            raise
        after[type(document), code_key(str(getattr(document, "id", "")))] = document
    return list(after.values())


def _changed(
    text: str,
    snapshot: Snapshot,
    dictionary: Dictionary,
    after: Mapping[tuple[type[Document], str], Document],
) -> Document:
    code, _, rest = " ".join(text.split()).partition(" ")
    requirement = after.get((Requirement, code_key(code))) or snapshot.find(Requirement, code)
    budget = after.get((Budget, code_key(code))) or snapshot.find(Budget, code)
    if isinstance(budget, Budget) and rest:
        return _of_budget(budget, rest, dictionary)
    if isinstance(requirement, Requirement):
        return _of_requirement(requirement, rest, dictionary, snapshot)
    if requirement is None and budget is None:
        raise DocumentError(f"{code} is neither a requirement nor a budget", hint=_SHAPES)
    raise DocumentError("the change does not say what changes", hint=_SHAPES)


def _of_requirement(
    requirement: Requirement, rest: str, dictionary: Dictionary, snapshot: Snapshot
) -> Requirement:
    word, _, limit = rest.partition(" ")
    if word.casefold() != "limit" or not limit.strip(" ="):
        raise DocumentError(f"of a requirement the limit may be tried, not {rest!r}", hint=_SHAPES)
    text = limit.strip().removeprefix("= ").strip()
    parameter = dictionary.get(requirement.quantity.parameter)
    read = parse_limit(text, parameter=parameter, unit_hint=requirement.limit.unit)
    if parameter is not None and read.unit and not suits(parameter, read.unit):
        raise DocumentError(
            f"the limit is in {read.unit}, {parameter.title} is in {parameter.unit}",
            hint="write it in a unit of the same kind",
        )
    conditions = snapshot.find(ConditionsSet, requirement.conditions)
    known = {one.name for one in conditions.dimensions} if conditions is not None else set()
    known |= {value.name for value in snapshot.all(DeclaredValue)}
    missing = sorted(limit_inputs(read) - known)
    if missing and not limit_inputs(requirement.limit) >= set(missing):
        raise DocumentError(
            f"nothing supplies {missing[0]}", hint="write a number with its unit, or a name that is declared"
        )
    return requirement.model_copy(update={"limit": read})


def _of_budget(budget: Budget, rest: str, dictionary: Dictionary) -> Budget:
    if rest.casefold().startswith("add "):
        return _added(budget, rest[len("add ") :], dictionary)
    if position := _POSITION.match(rest):
        return _of_position(budget, position["place"], position["what"].casefold(), position["value"] or "")
    name, equals, value = (part.strip() for part in rest.partition("="))
    if not equals or not value:
        raise DocumentError(f"nothing can be made of {rest!r}", hint=_SHAPES)
    if code_key(name) in _WHOLE:
        return _of_whole(budget, code_key(name), value)
    if name.casefold().endswith(" tolerance"):
        line = line_named(budget, name[: -len(" tolerance")], dictionary)
        return _with_line(budget, line, tolerance=read_tolerance(value, line.unit))
    line = line_named(budget, name, dictionary)
    read = read_line_value(value, CellContext(line.unit, _TEMPERATURES, ("frequency",)))
    return _with_line(budget, line, value=read.value, unit=read.unit, drifts=read.drifts)


def _added(budget: Budget, rest: str, dictionary: Dictionary) -> Budget:
    """Add a line to a position that is there."""
    name, equals, value = (part.strip() for part in rest.partition("="))
    place, parameter = named_parts(budget, name)
    if not equals or not value or not parameter:
        raise DocumentError(f"nothing can be made of {rest!r}", hint=_SHAPES)
    position = _position(budget, place)
    keys = sorted(parameter_keys(parameter, dictionary))
    found = next((one for key in keys if (one := dictionary.get(key))), None)
    if found is None:
        raise DocumentError(f"the parameter {parameter} is not known", hint="take one of the dictionary")
    read = read_line_value(value, CellContext("", _TEMPERATURES, ("frequency",)))
    line = BudgetLine(
        position=position.order,
        block=position.block,
        parameter=found.key,
        value=read.value,
        unit=read.unit,
        drifts=read.drifts,
    )
    return Budget.model_validate(dict(budget) | {"lines": (*budget.lines, line)})


def _with_block(budget: Budget, place: str, block: str) -> Budget:
    """Put another block at a position, or a new position into the chain."""
    if not block:
        raise DocumentError("the block is not named", hint="write 'position 2 block = ATT'")
    orders = {one.order for one in budget.chain}
    if place.isdecimal() and int(place) not in orders:
        added = (*budget.chain, BudgetPosition(order=int(place), block=block))
        return Budget.model_validate(dict(budget) | {"positions": added})
    order = _position(budget, place).order
    chain = tuple(
        one.model_copy(update={"block": block}) if one.order == order else one for one in budget.chain
    )
    lines = tuple(
        one.model_copy(update={"block": block}) if one.position == order else one for one in budget.lines
    )
    return Budget.model_validate(dict(budget) | {"positions": chain, "lines": lines})


def _with_line(budget: Budget, line: BudgetLine, **fields: Any) -> Budget:
    changed = line.model_copy(update=fields)
    lines = tuple(changed if one is line else one for one in budget.lines)
    return Budget.model_validate(dict(budget) | {"lines": lines})


def _of_position(budget: Budget, place: str, what: str, value: str) -> Budget:
    if what == "block":
        return _with_block(budget, place, value.strip())
    position = _position(budget, place)
    if what == "removed":
        lines = tuple(line for line in budget.lines if line.position != position.order)
        kept = tuple(one for one in budget.chain if one.order != position.order)
        groups = {code_key(line.correlation_group) for line in lines}
        pairs = tuple(
            one for one in budget.correlations if {code_key(one.first), code_key(one.second)} <= groups
        )
        return Budget.model_validate(
            dict(budget) | {"positions": kept, "lines": lines, "correlations": pairs}
        )
    update: dict[str, Any] = {}
    if what == "count":
        if not value.isdecimal() or int(value) < 1:
            raise DocumentError(f"{value!r} is no count", hint="write a whole number from 1")
        update["count"] = int(value)
    elif value.casefold() in ("yes", "no"):
        update["passive"] = value.casefold() == "yes"
    else:
        raise DocumentError(
            f"{value!r} is neither yes nor no", hint="write 'passive = yes' or 'passive = no'"
        )
    changed = tuple(
        one.model_copy(update=update) if one.order == position.order else one for one in budget.chain
    )
    return Budget.model_validate(dict(budget) | {"positions": changed})


def _position(budget: Budget, place: str) -> BudgetPosition:
    found = [
        one
        for one in budget.chain
        if place == str(one.order) or code_key(place) in (code_key(one.block), code_key(one.name))
    ]
    if len(found) == 1:
        return found[0]
    listed = ", ".join(f"{one.order} {one.label}" for one in budget.chain)
    message = f"{place} stands at several positions" if found else f"there is no position {place}"
    raise DocumentError(message, where=f"budget {budget.id}", hint=f"its positions are {listed}")


_WHOLE = ("input level", "noise source", "bandwidth")


def _of_whole(budget: Budget, name: str, value: str) -> Budget:
    quantity = parse_quantity(value)
    fields: dict[str, Any]
    if name == "input level":
        fields = {"input_level": quantity.value, "input_level_unit": quantity.unit.symbol}
    elif name == "noise source":
        fields = {"noise_source": convert(quantity.value, quantity.unit, parse_unit("K"))}
        _check_least(fields["noise_source"], value, "a temperature below 0 K", is_above=False)
    else:
        fields = {"bandwidth_hz": convert(quantity.value, quantity.unit, parse_unit("Hz"))}
        _check_least(fields["bandwidth_hz"], value, "no bandwidth: one is above 0 Hz", is_above=True)
    return Budget.model_validate(dict(budget) | fields)


def _check_least(number: float, text: str, wrong: str, *, is_above: bool) -> None:
    if number < 0 or (is_above and number == 0):
        raise DocumentError(f"{text!r} is {wrong}", hint="correct the sign, the number or the unit")


def read_tolerance(text: str, unit: str) -> LineTolerance | None:
    """Read ``0.5 dB limits uniform``, ``+0.5/-0.3 dB limits``, ``0.3 dB 2 sigma`` or ``none``. DocumentError else."""
    plain = text.replace("−", "-").strip()
    if plain.casefold() == "none":
        return None
    found = _TOLERANCE.match(plain)
    if found is None:
        raise DocumentError(
            f"{text!r} is no tolerance", hint="write '0.5 dB limits uniform' or '0.3 dB 2 sigma'"
        )
    own, wanted = parse_unit(unit), tolerance_unit(parse_unit(unit))
    written = to_tolerance(parse_unit(found["unit"]), own)[0] if found["unit"] else wanted
    plus, minus = (
        float(convert(float((part or found["both"]).replace(",", ".")), written, wanted, difference=True))
        for part in (found["plus"], found["minus"])
    )
    return LineTolerance(minus=minus, plus=plus, **_meaning(found["rest"] or "", text))


def _meaning(rest: str, text: str) -> dict[str, Any]:
    fields: dict[str, Any] = {}
    sigma = _SIGMA.search(rest)
    if sigma:
        fields |= {"meaning": Meaning.SIGMA, "k": float(sigma["k"].replace(",", "."))}
        rest = rest.replace(sigma[0], "")
    words = rest.replace(",", " ").casefold().strip()
    if "limits" in words:
        fields["meaning"] = Meaning.LIMITS
        words = words.replace("limits", "").strip()
    if words:
        try:
            fields["distribution"] = Distribution(words)
        except ValueError:
            known = ", ".join(Distribution)
            raise DocumentError(f"{words!r} in {text!r} is no distribution", hint=f"one of {known}") from None
    return fields
