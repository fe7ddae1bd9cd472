"""Noise at the image frequency of a mixer, carried along the chain beside the noise at the signal frequency.

In units of 290 K, with S the noise at the signal and Q that at the image frequency in front of a position of gain g,
noise factor F, image rejection r (the linear part of the image that its filter lets through) and physical temperature
t where it is passive, else 1:

- any position: S' = g·(S + F - 1), Q' = r·g·(Q + F - 1) + (1 - r)·t: where the image is kept off, the filter's own
  noise is left;
- a mixer of single-sideband factor F = 2·F_DSB: its filter first, q = r·Q + (1 - r)·t, then
  S' = Q' = g·(S + q + F - 2).

So a mixer behaves in Friis' formula as one of F + q - 1: its image's noise at 290 K, which every single-sideband figure
counts once, gives way to the noise that is really there. Valid: equal conversion gain in both sidebands; figures of the
positions in front hold at the image too. Source: computed; one amplifier in front gives ``image_noise_figure``.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import Enum

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain
from specflow.calculators.decibel import NEPER, ratio

Floats = NDArray[np.float64]
Arrays = Mapping[str, Floats]
_PER_NEPER = 10.0 / math.log(10.0)


class Turn(Enum):
    """What a position does to the two frequencies."""

    NONE = "none"
    PLAIN = "plain"  # a mixer behind which both are one again, its image as its noise figure takes it
    IMAGE = "image"  # a mixer whose image noise is followed from the input on


@dataclass(frozen=True, slots=True)
class Mixers:
    """What each position of a chain is to the image; ``last`` is the last mixer whose image noise counts."""

    turns: tuple[Turn, ...]
    last: int


def mixers_of(chain: Chain) -> Mixers | None:
    """Return the mixers of a chain, None where no image noise is followed: nothing states an image rejection."""
    rejecting = {read.row for read in chain.lines if read.role.figure == "image_rejection"}
    if not rejecting:
        return None
    sidebands = {read.row: read.line.sideband for read in chain.lines if read.role.figure == "noise_figure"}
    turns: list[Turn] = []
    is_stated = False
    for row in range(len(chain.positions)):
        is_stated |= row in rejecting
        sideband = sidebands.get(row, "")
        if not sideband:
            turns.append(Turn.NONE)
            continue
        turns.append(Turn.IMAGE if is_stated and sideband != "both" else Turn.PLAIN)
        is_stated = False
    counted = [row for row, turn in enumerate(turns) if turn is Turn.IMAGE]
    return Mixers(tuple(turns), counted[-1]) if counted else None


@dataclass(frozen=True, slots=True, eq=False)
class _Forward:
    """Noise in front of each position at signal and image, 290 K = 1; ``taken``: the mixers' factors with image."""

    signal: list[Floats]
    image: list[Floats]
    taken: dict[int, Floats]


def _linear(stages: Arrays, mixers: Mixers) -> tuple[Floats, Floats, Floats]:
    rows = slice(0, mixers.last + 1)
    return (
        ratio(stages["gain"][rows]),
        ratio(stages["noise_figure"][rows]),
        ratio(-stages["image_rejection"][rows]),
    )


def _forward(
    gain: Floats, noise: Floats, passed: Floats, mixers: Mixers, warmth: Sequence[Floats]
) -> _Forward:
    signal, image = [np.ones_like(gain[0])], [np.ones_like(gain[0])]
    taken: dict[int, Floats] = {}
    for row in range(mixers.last + 1):
        g, f, r, s, q = gain[row], noise[row], passed[row], signal[row], image[row]
        kept = (1.0 - r) * warmth[row]
        match mixers.turns[row]:
            case Turn.IMAGE:
                taken[row] = f - 1.0 + r * q + kept
                behind = g * (s + taken[row] - 1.0)
                signal.append(behind)
                image.append(behind)
            case Turn.PLAIN:
                behind = g * (s + f - 1.0)
                signal.append(behind)
                image.append(behind)
            case Turn.NONE:
                signal.append(g * (s + f - 1.0))
                image.append(r * g * (q + f - 1.0) + kept)
    return _Forward(signal, image, taken)


def with_image_noise(stages: Arrays, mixers: Mixers, warmth: Sequence[Floats]) -> dict[str, Floats]:
    """Return the figures with the mixers' noise figures taken with the image noise that reaches them.

    ``warmth`` is the physical temperature of each position over 290 K, 1 where it is not passive.
    """
    noise = stages["noise_figure"].copy()
    for row, factor in _forward(*_linear(stages, mixers), mixers, warmth).taken.items():
        noise[row] = _PER_NEPER * np.log(factor)
    return {**stages, "noise_figure": noise}


def gradient_through_image(
    stages: Arrays, mixers: Mixers, warmth: Sequence[Floats], gradient: Arrays
) -> dict[str, Floats]:
    """Return the derivatives to stated figures, from those to figures with image noise; the chain rule backwards."""
    found = {name: array.copy() for name, array in gradient.items()}
    for name in ("gain", "noise_figure", "image_rejection"):
        found.setdefault(name, np.zeros_like(stages["gain"]))
    if "noise_figure" not in gradient:
        return found
    gain, noise, passed = _linear(stages, mixers)
    forward = _forward(gain, noise, passed, mixers, warmth)
    to_signal, to_image = np.zeros_like(gain[0]), np.zeros_like(gain[0])
    for row in range(mixers.last, -1, -1):
        g, f, r, q = gain[row], noise[row], passed[row], forward.image[row]
        turn = mixers.turns[row]
        if turn is not Turn.NONE:
            to_signal, to_image = to_signal + to_image, np.zeros_like(to_image)
        to_gain = to_signal * forward.signal[row + 1]
        to_noise = g * to_signal
        to_passed = np.zeros_like(g)
        back_to_image = np.zeros_like(g)
        if turn is Turn.NONE:
            through = r * g * to_image
            to_gain = to_gain + through * (q + f - 1.0)
            to_noise = to_noise + through
            to_passed = to_image * (g * (q + f - 1.0) - warmth[row])
            back_to_image = through
        elif turn is Turn.IMAGE:
            direct = gradient["noise_figure"][row] * _PER_NEPER / forward.taken[row]
            found["noise_figure"][row] = 0.0
            to_noise = to_noise + direct
            to_passed = to_noise * (q - warmth[row])
            back_to_image = to_noise * r
        found["gain"][row] += to_gain * NEPER
        found["noise_figure"][row] += to_noise * f * NEPER
        found["image_rejection"][row] -= to_passed * r * NEPER
        to_signal, to_image = g * to_signal, back_to_image
    return found


def source_weights(stages: Arrays, mixers: Mixers) -> Floats:
    """Return (positions, ...) how much of the source's noise stands at images beside that at the signal, so far.

    0 in front of every mixer, r behind the first: what feeds the chain counts 1 + r times in its noise.
    """
    passed = ratio(-stages["image_rejection"])
    weights = np.zeros_like(passed)
    signal, image = np.ones_like(passed[0]), np.ones_like(passed[0])
    for row, turn in enumerate(mixers.turns):
        image = image * passed[row]
        if turn is Turn.IMAGE:
            signal = signal + image
        if turn is not Turn.NONE:
            image = signal
        weights[row] = signal - 1.0
    return weights


def source_weight_slopes(stages: Arrays, mixers: Mixers) -> Floats:
    """Return (positions, ...) the derivative of the last of ``source_weights`` to each image rejection, per dB."""
    passed = ratio(-stages["image_rejection"])
    in_front = []
    signal, image = np.ones_like(passed[0]), np.ones_like(passed[0])
    for row, turn in enumerate(mixers.turns):
        in_front.append(image)
        image = image * passed[row]
        if turn is Turn.IMAGE:
            signal = signal + image
        if turn is not Turn.NONE:
            image = signal
    slopes = np.zeros_like(passed)
    to_signal, to_image = np.ones_like(passed[0]), np.zeros_like(passed[0])
    for row in range(len(mixers.turns) - 1, -1, -1):
        turn = mixers.turns[row]
        if turn is not Turn.NONE:
            to_signal, to_image = to_signal + to_image, np.zeros_like(to_image)
        if turn is Turn.IMAGE:
            to_image = to_signal
        slopes[row] = -to_image * in_front[row] * passed[row] * NEPER
        to_image = to_image * passed[row]
    return slopes
