"""Which quantities are to be derived from a network: those that requirements on its block speak of, or that were said.

A plan names a law and the columns it reads; the laws themselves are not known here. What cannot be planned is told.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

from specflow.importers.measured.context import Context
from specflow.importers.measured.network_ports import Ports
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.conditions import ConditionsSet
from specflow.model.parameter import QuantityIdentity
from specflow.model.requirement import Requirement

Entry = tuple[int, int]

#: Statistics of a requirement that are judged on the values over frequency themselves.
_OF_A_TRACE = frozenset({""})


@dataclass(frozen=True, slots=True)
class Plan:
    """A law to be applied to entries of a network: ``entries`` (to port, from port) from 0, in the order of its roles.

    ``noise``: it reads the noise block instead. ``over`` is a range of the axis as said, "" for the whole file.
    """

    law: str
    quantity: QuantityIdentity
    entries: tuple[Entry, ...]
    why: str
    over: str = ""
    noise: bool = False


@dataclass
class Plans:
    """The plans, what is not derived and why, and what must be asked first."""

    plans: list[Plan] = field(default_factory=list)
    left: list[str] = field(default_factory=list)
    asked: list[str] = field(default_factory=list)


class _NotPlanned(Exception):
    """Why a quantity cannot be planned; ``asks`` where naming the ports would settle it."""

    def __init__(self, why: str, asks: bool = False) -> None:
        super().__init__(why)
        self.asks = asks


def plans_for(block: Block, ports: Ports, context: Context, said: str, has_noise: bool) -> Plans:
    """Plan what requirements on the block speak of, and what is said to be derived ("gain; return loss at input")."""
    found = Plans()
    if code_key(said) == "none":
        found.left.append("nothing is derived, as stated")
        return found
    wishes = [(one.quantity, one.id, _band(one, context)) for one in context.snapshot.requirements
              if code_key(one.block) == code_key(block.id)]  # fmt: skip
    if said:
        wishes = [(quantity, "as stated", "") for quantity in _said(said, context, found)]
    for quantity, why, band in wishes:
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
            plan = make(quantity, ports, why, band, has_noise)
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


def _add(found: Plans, plan: Plan) -> None:
    """Add a plan, or its reason to the one that gives the same quantity."""
    for place, known in enumerate(found.plans):
        if (known.quantity, known.over) == (plan.quantity, plan.over):
            if plan.why not in known.why.split(", "):
                found.plans[place] = Plan(
                    known.law,
                    known.quantity,
                    known.entries,
                    f"{known.why}, {plan.why}",
                    known.over,
                    known.noise,
                )
            return
    found.plans.append(plan)


def _said(text: str, context: Context, found: Plans) -> list[QuantityIdentity]:
    """Read "gain; return loss at input; isolation from out1 to out2"."""
    quantities = []
    for part in filter(None, (one.strip() for one in re.split(r"[;,]", text))):
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


def _band(requirement: Requirement, context: Context) -> str:
    """The range of frequency that a requirement speaks of, as a law takes it, "" where it has none."""
    conditions = context.snapshot.find(ConditionsSet, requirement.conditions)
    for dimension in conditions.dimensions if conditions else ():
        if dimension.name == "frequency" and dimension.span is not None:
            return f"frequency: {dimension.span.low!r}..{dimension.span.high!r} {dimension.unit}"
    return ""


def _single(found: list[int], what: str) -> int:
    if len(found) == 1:
        return found[0]
    if not found:
        raise _NotPlanned(f"no port is named {what!r}", asks=True)
    raise _NotPlanned(f"{len(found)} ports are {what!r}", asks=True)


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


Make = Callable[[QuantityIdentity, Ports, str, str, bool], Plan]


def _of(law: str, where: Callable[[QuantityIdentity, Ports], Entry], banded: bool = False) -> Make:
    """A plan of one entry; ``banded`` laws run over the band of the requirement, not over the whole file."""

    def make(quantity: QuantityIdentity, ports: Ports, why: str, band: str, _: bool) -> Plan:
        if banded and not band:
            raise _NotPlanned(
                "its conditions name no range of frequency to fit over (specflow derive takes one)"
            )
        return Plan(law, quantity, (where(quantity, ports),), why, band if banded else "")

    return make


def _of_paths(law: str) -> Make:
    def make(quantity: QuantityIdentity, ports: Ports, why: str, _band: str, _noise: bool) -> Plan:
        return Plan(law, quantity, _two_paths(quantity, ports), why)

    return make


def _of_noise(law: str) -> Make:
    def make(quantity: QuantityIdentity, _ports: Ports, why: str, _band: str, has_noise: bool) -> Plan:
        if not has_noise:
            raise _NotPlanned("the file has no noise block")
        return Plan(law, quantity, (), why, noise=True)

    return make


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
    "group_delay": _of("group delay", _forward),
    "phase_linearity": _of("phase linearity", _forward, banded=True),
    "amplitude_imbalance": _of_paths("amplitude imbalance"),
    "phase_imbalance": _of_paths("phase imbalance"),
    "noise_figure": _of_noise("noise figure"),
    "noise_figure_minimum": _of_noise("noise figure minimum"),
}

DERIVABLE: Sequence[str] = tuple(_LAWS)
