"""The quantity of a published limit: its parameter, from the title of the row, and what else the row says of it."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from specflow.importers.published_limits import PublishedLimit
from specflow.importers.published_row import slug
from specflow.limits import alternatives
from specflow.model.base import MAX_CODE_LENGTH
from specflow.model.limit import (
    Between,
    Bound,
    Gate,
    Limit,
    LimitNode,
    MeasuredIn,
    Population,
    Side,
    Tolerance,
)
from specflow.model.parameter import Better, Parameter, QuantityIdentity
from specflow.parameters import Candidate, Dictionary, suits
from specflow.units import convert, parse_unit

#: Conditions that name the plane a value is referred to.
_OF_PLANE = ("metric", "per", "reference_point")


@dataclass(frozen=True, slots=True)
class PublishedQuantity:
    """The quantity of a limit.

    ``proposed`` is a parameter that the project needs because no known one fits; ``why`` says what did not fit.
    ``said`` are the conditions, verbatim, that the identity says.
    """

    identity: QuantityIdentity
    parameter: Parameter
    proposed: Parameter | None
    why: str
    said: frozenset[str]


def published_quantity(
    limit: PublishedLimit, dictionary: Dictionary, proposed: Mapping[str, Parameter]
) -> PublishedQuantity:
    """Find the parameter of a limit, or propose one; ``proposed`` are those of the limits before, by key."""
    named, why = _named(limit, dictionary)
    new = None
    if named is None:
        new = _proposal(limit, dictionary)
        new = proposed.get(new.key, new)
        named = Candidate(new, "")
    plane, said = _plane(limit, named)
    identity = QuantityIdentity(
        parameter=named.parameter.key,
        plane=plane,
        statistic=named.statistic,
        bandwidth_hz=_bandwidth_hz(limit.limit),
    )
    return PublishedQuantity(identity, named.parameter, new, why, said)


def _named(limit: PublishedLimit, dictionary: Dictionary) -> tuple[Candidate | None, str]:
    """Return the one parameter that the title names and the unit suits; else None and why."""
    title = limit.parameter_title
    found = dictionary.match(title)
    exact = [one for one in found if one.parameter.title.casefold() == title.casefold()]
    found = exact if len(exact) == 1 else found
    if len(found) > 1:
        keys = ", ".join(one.parameter.key for one in found)
        return None, f"{title!r} may be any of {keys}"
    if not found:
        near = ", ".join(parameter.key for parameter in dictionary.suggest(title))
        return None, f"{title!r} is no known parameter" + (f" (near: {near})" if near else "")
    units = _units(limit.limit)
    if units and not any(suits(found[0].parameter, unit) for unit in units):
        key, unit = found[0].parameter.key, found[0].parameter.unit
        return None, f"{title!r} is {key} in {unit}, but the limit is in {' and '.join(units)}"
    return found[0], ""


def _proposal(limit: PublishedLimit, dictionary: Dictionary) -> Parameter:
    """A parameter of the project for a title that names none: key, unit and direction from the row."""
    unit = next(iter(_units(limit.limit)), "1")
    key = slug(limit.parameter_title).casefold()[: MAX_CODE_LENGTH - 12] or "published_value"
    if dictionary.get(key) is not None:
        key = f"{key}_{slug(unit).casefold()}"
    return Parameter(
        key=key,
        title=limit.parameter_title or key,
        group="published",
        unit=unit,
        better=_better(limit.limit.tree),
        needs_bandwidth=parse_unit(unit).bandwidth_hz is not None,
        description=f"Proposed from {limit.document} {limit.clause}".strip() + "; check direction and kind.",
    )


def _units(limit: Limit) -> Sequence[str]:
    if limit.unit:
        return [limit.unit]
    return [unit for unit in (one.limit.unit for one in alternatives(limit) if not one.quantity) if unit]


def _better(tree: LimitNode) -> Better:
    match tree:
        case Bound(side=side):
            return Better.HIGHER if side is Side.LOWER else Better.LOWER
        case Tolerance(nominal=None):
            return Better.NEARER_ZERO
        case Gate() | MeasuredIn() | Population():
            return _better(tree.limit)
        case Between():
            return Better.NEITHER
    return Better.NEITHER


def _plane(limit: PublishedLimit, named: Candidate) -> tuple[str, frozenset[str]]:
    """The plane a condition ("metric=TRP") or the title ("(TRP)") names, and the condition if it says just that."""
    known = {plane.casefold(): plane for plane in named.parameter.planes}
    written = [*(one.verbatim for one in limit.conditions.values()), *limit.unparsed]
    for verbatim in written:
        key, _, value = verbatim.partition("=")
        plane = known.get(value.casefold()) if key in _OF_PLANE else None
        if plane is not None:
            return plane, frozenset({verbatim})
    metric = next((one.partition("=")[2] for one in written if one.startswith("metric=")), "")
    # "EIRP at TX beam peak" names the plane and more, so the condition stays text as well.
    head = re.match(r"\w+", metric)
    return known.get(head.group().casefold() if head else "", named.plane), frozenset()


def _bandwidth_hz(limit: Limit) -> float | None:
    """The one reference bandwidth of a limit: that of its unit, or that it is measured in."""
    if limit.unit and (bandwidth := parse_unit(limit.unit).bandwidth_hz) is not None:
        return bandwidth
    tree = limit.tree
    while isinstance(tree, Gate | Population):
        tree = tree.limit
    if isinstance(tree, MeasuredIn):
        return float(convert(tree.bandwidth.value, parse_unit(tree.bandwidth.unit), parse_unit("Hz")))
    return None
