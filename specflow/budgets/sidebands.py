"""What is refused of mixers: figures of the wrong sideband, image rejections that belong to no mixer."""

from __future__ import annotations

import math

import numpy as np

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.image import Turn, mixers_of
from specflow.budgets.spread import bounds
from specflow.errors import CalculationError
from specflow.model.base import code_key

#: A single-sideband noise figure counts the image at 290 K once, so that a noiseless mixer has this.
LEAST_SINGLE_SIDEBAND_DB = 10.0 * math.log10(2.0)
_SMALL = 1e-9


def check_sidebands(chain: Chain) -> None:
    """Refuse what would count 3 dB of a mixer twice or not at all. CalculationError that names position and line."""
    turns = _turns(chain)
    for read in chain.lines:
        if read.role.figure == "noise_figure":
            _check_noise(chain, read, turns[read.row])
        elif read.role.figure == "image_rejection":
            _check_rejection(chain, read)


def _turns(chain: Chain) -> tuple[Turn, ...]:
    mixers = mixers_of(chain)
    return (Turn.NONE,) * len(chain.positions) if mixers is None else mixers.turns


def _where(chain: Chain, read: ReadLine) -> str:
    return f"budget {chain.budget.id}, {read.line.place}"


def _check_noise(chain: Chain, read: ReadLine, turn: Turn) -> None:
    sideband = read.line.sideband
    if sideband == "DSB" and turn is not Turn.IMAGE:
        raise CalculationError(
            "a double-sideband noise figure stands where the cascade takes a single-sideband one",
            where=_where(chain, read),
            hint="say how much of the image is kept off: an image_rejection line of the mixer, or of the filter in "
            "front of it (0 dB where nothing filters); or give the single-sideband figure, 3.01 dB more for a mixer "
            "alone; or say 'both' where the wanted signal is in both sidebands",
        )
    if turn is Turn.IMAGE and chain.positions[read.row].path:
        raise CalculationError(
            "image noise is not followed into parallel paths",
            where=_where(chain, read),
            hint="give the single-sideband figure of the path with its filter, without image_rejection",
        )
    if sideband != "SSB" or turn is not Turn.IMAGE:
        return
    if code_key(read.line.parameter) == "noise_temperature":
        raise CalculationError(
            "books differ on whether a single-sideband noise temperature has the image's 290 K in it",
            where=_where(chain, read),
            hint="give the noise figure, or the double-sideband temperature",
        )
    least = float(np.min(read.figure(bounds(read)[0])))
    if least < LEAST_SINGLE_SIDEBAND_DB - _SMALL:
        raise CalculationError(
            f"a single-sideband noise figure of {least:.3g} dB is below 3.01 dB, which the image alone makes",
            where=_where(chain, read),
            hint="is it a double-sideband figure? Then say DSB",
        )


def _check_rejection(chain: Chain, read: ReadLine) -> None:
    """An image rejection belongs to the next mixer, whose noise figure has to say its sideband."""
    if chain.positions[read.row].path:
        raise CalculationError(
            "image noise is not followed into parallel paths",
            where=_where(chain, read),
            hint="let the filter stand in front of the paths or behind them",
        )
    following = (
        other
        for row in range(read.row, len(chain.positions))
        for other in chain.lines
        if other.row == row and other.role.figure == "noise_figure" and other.line.sideband
    )
    mixer = next(following, None)
    if mixer is None:
        raise CalculationError(
            "no mixer stands here or behind it: no noise figure says SSB or DSB",
            where=_where(chain, read),
            hint="say at the mixer's noise figure whether it is SSB or DSB, or leave the image rejection out",
        )
    if mixer.line.sideband == "both":
        raise CalculationError(
            f"the wanted signal of {mixer.line.place} is in both sidebands, so there is no image to reject",
            where=_where(chain, read),
            hint="leave the image rejection out, or say DSB at the mixer",
        )
