"""Which law gives which quantity, and what it needs of every position.

``LAWS`` is the table: a cascade gives many quantities at once; a sum gives the one its budget is of.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specflow.budgets.cascade import CASCADE
from specflow.budgets.chain import Chain
from specflow.budgets.further import check_further
from specflow.budgets.outputs import Output
from specflow.budgets.sidebands import check_sidebands
from specflow.budgets.sums import sum_output
from specflow.calculators.passive_loss import passive_noise_figure
from specflow.errors import CalculationError, DocumentError
from specflow.model.base import code_key
from specflow.model.budget import Budget, Law
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.units import Kind, parse_unit

_CASCADE_BY_NAME = {output.parameter: output for output in CASCADE}
_INTERFERERS = ("blocker", "tones", "leaked_noise", "isolation", "allowed_rise")
_SOURCES = ("antenna_gain", "source_k", "source_level", "snr", "dc_w", *_INTERFERERS)
_LINE_NAMES = {
    "gain": "gain or loss",
    "noise_figure": "noise figure",
    "iip3": "third-order intercept (iip3 or oip3)",
    "iip2": "second-order intercept (iip2 or oip2)",
    "ip1db": "compression point (ip1db or op1db)",
}


def quantities(law: Law) -> tuple[str, ...]:
    """Name the parameters that a law gives; none are listed for a sum, which gives what its budget is of."""
    return tuple(_CASCADE_BY_NAME) if law is Law.CASCADE else ()


def outputs_of(budget: Budget, snapshot: Snapshot, dictionary: Dictionary) -> list[Output]:
    """Return what the budget gives: its own quantity and those of the requirements it serves, each once."""
    wanted = {code_key(budget.quantity.parameter): budget.quantity.parameter}
    for requirement in served(budget, snapshot):
        wanted.setdefault(code_key(requirement.quantity.parameter), requirement.quantity.parameter)
    return [_output(budget, name, dictionary) for name in wanted.values()]


def served(budget: Budget, snapshot: Snapshot) -> list[Requirement]:
    """Return the requirements that a budget serves. DocumentError where there is none, or one is not in the project."""
    where = f"budget {budget.id}"
    if not budget.requirements:
        raise DocumentError(
            "the budget serves no requirement, so it has no limit",
            where=where,
            hint="name the requirement it serves",
        )
    found = [(code, snapshot.find(Requirement, code)) for code in budget.requirements]
    missing = [code for code, one in found if one is None]
    if missing:
        raise DocumentError(
            f"the requirement {missing[0]} is not in the project",
            where=where,
            hint="load it, or correct its id",
        )
    requirements = [one for _, one in found if one is not None]
    for one in requirements:
        _check_identity(budget, one)
    return requirements


def _check_identity(budget: Budget, requirement: Requirement) -> None:
    """Only like compares with like: what both state of plane, statistic and polarisation is the same."""
    own, other = budget.quantity, requirement.quantity
    if code_key(own.parameter) != code_key(other.parameter):
        return
    for part in ("plane", "statistic", "polarisation"):
        here, there = getattr(own, part), getattr(other, part)
        if here and there and code_key(here) != code_key(there):
            raise DocumentError(
                f"the budget gives {own.parameter} with {part} {here}, the requirement is on {part} {there}",
                where=f"budget {budget.id}, requirement {requirement.id}",
                hint=f"carry the chain on to {there}, or serve a requirement on {here}"
                if part == "plane"
                else f"serve a requirement with {part} {here}",
            )


def _output(budget: Budget, name: str, dictionary: Dictionary) -> Output:
    key, where = code_key(name), f"budget {budget.id}"
    if budget.law is Law.CASCADE:
        if key not in _CASCADE_BY_NAME:
            raise DocumentError(
                f"a cascade gives no {name}",
                where=where,
                hint=f"it gives {', '.join(_CASCADE_BY_NAME)}; take a sum, or serve another requirement",
            )
        return _CASCADE_BY_NAME[key]
    if key != code_key(budget.quantity.parameter):
        raise DocumentError(
            f"the {budget.law} is of {budget.quantity.parameter}, a requirement served is on {name}",
            where=where,
            hint=f"make a budget of {name} for it",
        )
    parameter = dictionary.get(name)
    assert parameter is not None  # checked when the budget was read
    _check_sum(budget, parameter.unit)
    return sum_output(budget.law, parameter.key, parameter.unit)


def _check_sum(budget: Budget, unit: str) -> None:
    """Levels are never combined by root sum of squares, and gains never as powers."""
    where, kind = f"budget {budget.id}", parse_unit(unit)
    if budget.law is Law.ROOT_SUM_OF_SQUARES and kind.is_log:
        raise CalculationError(
            f"{budget.quantity.parameter} is in {unit}; a root of squares is of amplitudes, not of decibels",
            where=where,
            hint="take the power sum for levels, the sum for gains and losses",
        )
    if budget.law in (Law.POWER_SUM, Law.VOLTAGE_SUM):
        is_gain = code_key(budget.quantity.parameter) in ("gain", "insertion_loss", "antenna_gain")
        if not kind.is_log or is_gain:
            raise CalculationError(
                f"{budget.quantity.parameter} in {unit} does not add as {budget.law.value.split()[0]}s",
                where=where,
                hint="a power sum takes levels, or contributions in dBc; gains and losses are added",
            )


def check_complete(chain: Chain, outputs: Sequence[Output]) -> None:
    """Refuse a chain whose positions lack a figure that a law needs. CalculationError that names position and line."""
    if chain.budget.law is Law.CASCADE:
        for output in outputs:
            _check_positions(chain, output)
            _check_asked(chain, output)
            check_further(chain, output)
        _check_passive_noise(chain)
        check_sidebands(chain)
    else:
        _check_terms(chain)


def _given(chain: Chain) -> list[set[str]]:
    given: list[set[str]] = [set() for _ in chain.positions]
    for read in chain.lines:
        given[read.row].add(read.role.figure)
    return given


def _check_positions(chain: Chain, output: Output) -> None:
    given = _given(chain)
    last = len(given) - 1
    for row, (position, figures) in enumerate(zip(chain.positions, given, strict=True)):
        if figures and figures <= set(_SOURCES):
            continue  # an antenna or a source: it has no gain of its own
        for figure in output.needs:
            if figure in figures or figure in _SOURCES:
                continue
            if figure == "gain":
                needed = row < last or output.last_gain or bool(position.path)
                why = (
                    f"the positions behind it count through its gain, {chain.positions[-1].block} at the end"
                )
                why = why if row < last else f"{output.parameter} needs the gain of every position"
            else:
                needed = not position.passive
                why = f"{output.parameter} needs one of every position that is not passive"
            if needed:
                raise CalculationError(
                    f"there is no {_LINE_NAMES[figure]} for {output.parameter}: {why}",
                    where=chain.place(row),
                    hint=f"add the line, or mark {position.block} as passive if it is"
                    if figure != "gain"
                    else "add the line; 0 dB where the block neither gains nor loses",
                )


def _check_asked(chain: Chain, output: Output) -> None:
    budget, figures = chain.budget, {read.role.figure for read in chain.lines}
    has = {
        "input level": chain.input_level is not None,
        "noise source": budget.noise_source is not None or "source_k" in figures,
        "bandwidth": budget.bandwidth_hz is not None,
        "channel spacing": budget.channel_spacing_hz is not None,
        "antenna gain": "antenna_gain" in figures,
        "signal-to-noise ratio": "snr" in figures,
        "DC power": bool(figures & {"dc_w", "efficiency", "added_efficiency"}),
        "interference": bool(figures & {"blocker", "tones", "leaked_noise"}),
        "phase noise": "phase_noise" in figures,
        "rise allowed": "allowed_rise" in figures,
    }
    how = {
        "input level": "give the budget an input level, the first position an output_power line, or state input_level "
        "in the conditions set",
        "noise source": "give the budget a noise source, or the antenna a line antenna_noise_temperature",
        "bandwidth": "give the budget its noise bandwidth",
        "channel spacing": "give the budget the spacing of the adjacent channel",
        "antenna gain": "give the antenna a line antenna_gain",
        "signal-to-noise ratio": "give a line snr: the ratio needed, with implementation loss",
        "DC power": "give the active positions a line dc_power, drain_efficiency or pae",
        "interference": "give a line blocking_level (with phase_noise of a mixer), receiver_intermodulation (two "
        "tones) or noise_density (of a transmitter)",
        "phase noise": "give the mixer a line phase_noise at the offset of the blocker",
        "rise allowed": "give a line desensitisation: the rise of the noise that the blocker may cause",
    }
    for what in output.asks:
        if not has[what]:
            raise CalculationError(
                f"{output.parameter} needs the {what}", where=f"budget {budget.id}", hint=how[what]
            )


def _check_passive_noise(chain: Chain) -> None:
    """A passive loss makes at least the noise of its loss: a noise figure below that is a mistake."""
    for read in chain.lines:
        if read.role.figure != "noise_figure" or not chain.positions[read.row].passive:
            continue
        gains = [chain.lines[number] for number in chain.at(read.row, "gain")]
        loss = -sum((one.figure(one.values) for one in gains), np.zeros(1))
        kelvin = chain.temperature_k[read.row]
        least = passive_noise_figure(loss, np.where(np.isnan(kelvin), 290.0, kelvin))
        short = least - read.figure(read.values)
        if float(np.max(short)) > 1e-6:
            row = int(np.argmax(short))
            raise CalculationError(
                f"the noise figure is {float(np.max(short)):.3g} dB below that of the loss at its physical temperature "
                f"({chain.required.words(row)})",
                where=chain.place(read.row),
                hint="leave the noise figure out: it follows from loss and temperature",
            )


def _check_terms(chain: Chain) -> None:
    """Sums: one level at most where levels do not add; one contribution a position where they do not add plainly."""
    where = f"budget {chain.budget.id}"
    paths = [row for row, position in enumerate(chain.positions) if position.path]
    if paths:
        raise CalculationError(
            f"a {chain.budget.law} has no parallel paths: its positions are contributions side by side",
            where=chain.place(paths[0]),
            hint="leave the path out, or take a cascade",
        )
    if chain.budget.law is Law.SUM:
        levels = [read for read in chain.lines if parse_unit(read.role.unit).kind is not Kind.RATIO]
        if len(levels) > 1 and parse_unit(levels[0].role.unit).is_log:
            raise CalculationError(
                f"levels do not add: {levels[0].line.place} and {levels[1].line.place}",
                where=where,
                hint="one level and any number of gains and losses make a sum; ask for a power sum by name",
            )
        return
    for row in range(len(chain.positions)):
        if len(chain.at(row, "amount")) > 1:
            raise CalculationError(
                f"a {chain.budget.law} takes one contribution a position",
                where=chain.place(row),
                hint="give the second contribution a position of its own",
            )
