"""Which quantities are to be derived from a network: those that requirements on its block speak of, or that were said.

A plan names a law and the columns it reads; the laws themselves are not known here. What cannot be planned is told.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

from specflow.importers.measured.context import Context
from specflow.importers.measured.limit_turn import turn_of
from specflow.importers.measured.network_ports import Ports
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.conditions import ConditionsSet
from specflow.model.parameter import QuantityIdentity
from specflow.model.requirement import Requirement

Entry = tuple[int, int]

#: The range of a plan over all frequencies of the file.
WHOLE = "whole"

#: What parts the quantities that a person names; a comma before a digit belongs to a mode (D2,3).
_BETWEEN = re.compile(r";|,(?!\d)")

#: Statistics of a requirement that are judged on the values over frequency themselves.
_OF_A_TRACE = frozenset({""})


@dataclass(frozen=True, slots=True)
class Plan:
    """A law to be applied to entries of a network: ``entries`` (to port, from port) from 0, in the order of its roles.

    ``noise``: it reads the noise block instead. ``over`` is a range of the axis as said, ``WHOLE`` that of the file, ""
    where the law goes row by row.
    """

    law: str
    quantity: QuantityIdentity
    entries: tuple[Entry, ...]
    why: str
    over: str = ""
    noise: bool = False
    settings: Mapping[str, str] = field(default_factory=dict)


@dataclass
class Plans:
    """The plans, what is not derived and why, and what must be asked first."""

    plans: list[Plan] = field(default_factory=list)
    left: list[str] = field(default_factory=list)
    asked: list[str] = field(default_factory=list)


@dataclass(frozen=True, slots=True)
class _Wish:
    """A quantity that is wanted, by whom, and what the requirement and the person say about it."""

    quantity: QuantityIdentity
    why: str
    band: str = ""
    scan: str = ""
    spacing: str = ""
    near: str = ""


class _NotPlanned(Exception):
    """Why a quantity cannot be planned; ``asks`` where naming the ports would settle it."""

    def __init__(self, why: str, asks: bool = False) -> None:
        super().__init__(why)
        self.asks = asks


def plans_for(
    block: Block, ports: Ports, context: Context, said_of_network: Mapping[str, str], has_noise: bool
) -> Plans:
    """Plan what requirements on the block speak of, or what is said to be derived ("gain; return loss at input").

    ``said_of_network``: "derive", and "spacing" of the elements of an array.
    """
    found, said = Plans(), said_of_network.get("derive", "")
    if code_key(said) == "none":
        found.left.append("nothing is derived, as stated")
        return found
    spacing = said_of_network.get("spacing", "")
    wishes = [_Wish(quantity, "as stated", spacing=spacing) for quantity in _said(said, context, found)]
    if not said:
        wishes = _required(block, context, spacing)
    for wish in wishes:
        quantity, why = wish.quantity, wish.why
        make = _LAWS.get(quantity.parameter)
        if make is None:
            if said:
                found.left.append(f"{quantity.parameter} is not made from scattering parameters")
            continue
        if quantity.statistic.casefold() not in _OF_A_TRACE:
            found.left.append(
                f"{why}: {quantity.parameter}, {quantity.statistic}: a law over a range gives it (specflow derive)"
            )
            continue
        try:
            plan = make(wish, ports, has_noise)
        except _NotPlanned as error:
            (found.asked if error.asks else found.left).append(f"{why}: {quantity.parameter}: {error}")
            continue
        _add(found, plan)
    if not wishes and not found.left:
        found.left.append(
            f"no requirement on {block.id} speaks of a quantity of this network, nothing is derived; "
            '--state "derive=gain; return loss at input" says what is'
        )
    return found


def _required(block: Block, context: Context, spacing: str) -> list[_Wish]:
    """What the requirements on a block want."""
    own = [one for one in context.snapshot.requirements if code_key(one.block) == code_key(block.id)]
    return [
        _Wish(
            one.quantity,
            one.id,
            _span(one, context, "frequency"),
            _span(one, context, "scan_theta"),
            spacing,
            turn_of(one.limit.tree),
        )
        for one in own
    ]


def _add(found: Plans, plan: Plan) -> None:
    """Add a plan, or its reason to the one that gives the same quantity."""
    for place, known in enumerate(found.plans):
        if replace(plan, why=known.why) == known:
            if plan.why not in known.why.split(", "):
                found.plans[place] = replace(known, why=f"{known.why}, {plan.why}")
            return
    found.plans.append(plan)


def _said(text: str, context: Context, found: Plans) -> list[QuantityIdentity]:
    """Read "gain; return loss at input; isolation from out1 to out2"."""
    quantities = []
    for part in filter(None, (one.strip() for one in _BETWEEN.split(text))):
        name, plane = part, ""
        match = re.match(
            r"^(?P<name>.+?)\s+(?:(?:at|of)\s+(?P<at>.+)|from\s+(?P<way>.+))$", part, re.IGNORECASE
        )
        if match:
            name, plane = match["name"], (match["at"] or match["way"]).strip()
        candidates = context.dictionary.match(name)
        keys = [one.parameter.key for one in candidates if one.parameter.key in _LAWS]
        if len(keys) != 1:
            found.asked.append(f"{part!r} names no quantity that is made from scattering parameters")
            continue
        quantities.append(QuantityIdentity(parameter=keys[0], plane=plane))
    return quantities


def _span(requirement: Requirement, context: Context, name: str) -> str:
    """The range of a dimension that a requirement speaks of, as a law takes it, "" where it has none."""
    conditions = context.snapshot.find(ConditionsSet, requirement.conditions)
    for dimension in conditions.dimensions if conditions else ():
        if dimension.name == name and dimension.values and name != "frequency":
            return f"{name}: {', '.join(repr(value) for value in dimension.values)} {dimension.unit}"
        if dimension.name == name and dimension.span is not None:
            span = dimension.span
            step = (
                f" step {span.step!r} {dimension.unit}"
                if span.step is not None and name != "frequency"
                else ""
            )
            return f"{name}: {span.low!r}..{span.high!r} {dimension.unit}{step}"
    return ""


def _single(found: list[int], what: str) -> int:
    if len(found) == 1:
        return found[0]
    if not found:
        raise _NotPlanned(f"no port is named {what!r}", asks=True)
    numbers = ", ".join(str(place + 1) for place in found)
    raise _NotPlanned(
        f"the ports {numbers} are all {what!r}: its plane must name one of them, as in 'port 2' or 'port 1 to port 2'"
    )


def _forward(quantity: QuantityIdentity, ports: Ports) -> Entry:
    """The entry from the input to the output, or along the plane "A to B"."""
    way = ports.way(quantity.plane)
    start, end = (ports.find("input"), ports.find("output")) if way is None else way
    if way is None and quantity.plane and not ports.find(quantity.plane):
        raise _NotPlanned(f"its plane {quantity.plane!r} names no ports of this network", asks=True)
    names = quantity.plane.split(" to ") if way is not None else ["input", "output"]
    return _single(end, names[-1]), _single(start, names[0])


def _backward(quantity: QuantityIdentity, ports: Ports) -> Entry:
    """The entry from the output back to the input."""
    way = ports.way(quantity.plane)
    start, end = (ports.find("output"), ports.find("input")) if way is None else way
    return _single(end, "input"), _single(start, "output")


def _between(quantity: QuantityIdentity, ports: Ports) -> Entry:
    """The entry between two ports that are named, or between the two outputs."""
    way = ports.way(quantity.plane)
    if way is not None and quantity.plane.casefold() not in ("port to port", "output to output"):
        names = quantity.plane.split(" to ")
        return _single(way[1], names[-1]), _single(way[0], names[0])
    outputs = ports.outputs()
    if len(outputs) == 2:
        return outputs[1], outputs[0]
    raise _NotPlanned('its plane must name the two ports ("output 1 to output 2")', asks=not outputs)


def _reflection(quantity: QuantityIdentity, ports: Ports) -> Entry:
    if not quantity.plane or quantity.plane.casefold() == "port":
        if len(ports.names) == 1:
            return 0, 0
        raise _NotPlanned("it does not say of which port: its plane must name one (input, output, port 3)")
    port = _single(ports.find(quantity.plane), quantity.plane)
    return port, port


def _two_paths(quantity: QuantityIdentity, ports: Ports) -> tuple[Entry, Entry]:
    """The entries from the input to two outputs, first minus second."""
    way = ports.way(quantity.plane) if quantity.plane.casefold() != "output to output" else None
    ends = ports.outputs() if way is None else [_single(one, "output") for one in way]
    if len(ends) != 2:
        raise _NotPlanned(f"an imbalance is of two outputs, {len(ends)} are named", asks=True)
    start = _single(ports.find("input"), "input")
    return (ends[0], start), (ends[1], start)


Make = Callable[[_Wish, Ports, bool], Plan]


def _of(law: str, where: Callable[[QuantityIdentity, Ports], Entry], over: str = "") -> Make:
    """A plan of one entry, row by row or over the whole file."""

    def make(wish: _Wish, ports: Ports, _: bool) -> Plan:
        return Plan(law, wish.quantity, (where(wish.quantity, ports),), wish.why, over)

    return make


def _linearity(wish: _Wish, ports: Ports, _: bool) -> Plan:
    """A line is fitted over the band of the requirement, never over another."""
    if not wish.band:
        raise _NotPlanned("its conditions name no range of frequency to fit over (specflow derive takes one)")
    return Plan("phase linearity", wish.quantity, (_forward(wish.quantity, ports),), wish.why, wish.band)


def _of_paths(law: str) -> Make:
    def make(wish: _Wish, ports: Ports, _: bool) -> Plan:
        settings = {"near": wish.near} if wish.near and law == "phase imbalance" else {}
        return Plan(law, wish.quantity, _two_paths(wish.quantity, ports), wish.why, settings=settings)

    return make


def _noise_figure(wish: _Wish, _: Ports, has_noise: bool) -> Plan:
    if not has_noise:
        raise _NotPlanned("the file has no noise block")
    return Plan("noise figure", wish.quantity, (), wish.why, noise=True)


def _active(wish: _Wish, ports: Ports, _: bool) -> Plan:
    """All entries, the ports as elements of a line in their order; spacing and scan must be said."""
    if not wish.spacing:
        raise _NotPlanned('the spacing of the elements is not said (--state "spacing=5 mm")')
    if not wish.scan:
        raise _NotPlanned("its conditions name no angles of scan_theta")
    entries = tuple((i, j) for i in range(len(ports.names)) for j in range(len(ports.names)))
    settings = {"spacing": wish.spacing, "scan": wish.scan.partition(": ")[2]}
    return Plan("active reflection", wish.quantity, entries, wish.why, WHOLE, settings=settings)


_LAWS: dict[str, Make] = {
    "gain": _of("gain", _forward),
    "transmission_magnitude": _of("gain", _forward),
    "reverse_transmission": _of("gain", _backward),
    "reflection_magnitude": _of("gain", _reflection),
    "insertion_loss": _of("loss", _forward),
    "attenuation": _of("loss", _forward),
    "return_loss": _of("loss", _reflection),
    "reverse_isolation": _of("loss", _backward),
    "isolation": _of("loss", _between),
    "coupling": _of("loss", _between),
    "vswr": _of("vswr", _reflection),
    "phase": _of("phase", _forward),
    "group_delay": _of("group delay", _forward, WHOLE),
    "phase_linearity": _linearity,
    "amplitude_imbalance": _of_paths("amplitude imbalance"),
    "phase_imbalance": _of_paths("phase imbalance"),
    "noise_figure": _noise_figure,
    "active_reflection": _active,
}
