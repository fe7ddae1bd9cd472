"""What all drawings are made of: colours, words, strokes and round values on an axis."""

from __future__ import annotations

import math
from html import escape

INK, QUIET, LINE = "#1d2733", "#5d6b76", "#d5dde4"
GOOD = "#7fa99b"
WIDTH = 860


def text(x: float, y: float, words: str, anchor: str = "start", fill: str = INK, more: str = "") -> str:
    """Return words at a place."""
    return f'<text x="{x:.1f}" y="{y:.1f}" text-anchor="{anchor}" fill="{fill}"{more}>{escape(words)}</text>'


def stroke(x1: float, y1: float, x2: float, y2: float, colour: str = LINE, more: str = "") -> str:
    """Return a straight line."""
    return f'<line x1="{x1:.1f}" y1="{y1:.1f}" x2="{x2:.1f}" y2="{y2:.1f}" stroke="{colour}"{more}/>'


def ticks(low: float, high: float, most: int = 8) -> list[float]:
    """Return round values from ``low`` to ``high``: steps of 1, 2 or 5 times a power of ten, at most ``most``."""
    rough = (high - low) / most
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(power * factor for factor in (1, 2, 5, 10) if power * factor >= rough * (1 - 1e-9))
    first = math.ceil(low / step - 1e-9)
    last = math.floor(high / step + 1e-9)
    return [at * step for at in range(first, last + 1)]
