"""Pictures as lines of plain text, for a terminal or a log: blocks and dots on one axis."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from specflow.model.picture import (
    ContributionBars,
    Distribution,
    LevelDiagram,
    Picture,
    Series,
    TracePicture,
)
from specflow.reports.figures import rounded
from specflow.reports.trace_text import trace_lines

SIGNS = {"signal": "●", "noise": "○", "bound": "▕"}
_EIGHTHS = " ▏▎▍▌▋▊▉█"
_HEIGHTS = " ▁▂▃▄▅▆▇█"
_LEAST_NAME, _MOST_NAME = 6, 34
_LEAST_PLOT = 16
_TALL = 8


@dataclass(frozen=True, slots=True)
class Scale:
    """Values from ``low`` to ``high`` on ``width`` columns."""

    low: float
    high: float
    width: int

    def column(self, value: float) -> int:
        """Return the column of a value, within the scale."""
        part = (value - self.low) / (self.high - self.low)
        return min(max(round(part * (self.width - 1)), 0), self.width - 1)


def picture_lines(picture: Picture, width: int = 78) -> list[str]:
    """Return a picture as lines, at most ``width`` wide, title first."""
    match picture:
        case LevelDiagram():
            drawn = level_lines(picture, width)
        case ContributionBars():
            drawn = bar_lines(picture, width)
        case Distribution():
            drawn = distribution_lines(picture, width)
        case TracePicture():
            drawn = trace_lines(picture, width)
    return [picture.title, *drawn]


def _short(name: str, room: int) -> str:
    width = min(max(room, _LEAST_NAME), _MOST_NAME)
    return name if len(name) <= width else name[: width - 1] + "…"


# Levels: a row a station, all series on one axis


def level_lines(picture: LevelDiagram, width: int) -> list[str]:
    """Return one line a station: its values, then their marks on a common axis."""
    columns = [max(map(len, one.texts)) for one in picture.series]
    values = sum(column + 2 for column in columns) + 2
    names = [_short(name, width - values - _LEAST_PLOT) for name in picture.stations]
    wide = max(map(len, names))
    left = wide + values
    scale = Scale(*picture.span, width=max(width - left, _LEAST_PLOT))
    ends = f"{rounded(scale.low, 1)}", f"{rounded(scale.high, 1)} {picture.unit}"
    axis = ends[0] + ends[1].rjust(scale.width - len(ends[0]))
    lines = [" " * left + axis]
    for place, name in enumerate(names):
        numbers = "".join(
            f"  {one.texts[place].rjust(column)}" for one, column in zip(picture.series, columns, strict=True)
        )
        lines.append(f"{name.ljust(wide)}{numbers}  {_station(picture.series, place, scale)}".rstrip())
    legend = [f"{SIGNS[one.look]} {one.name}" for one in picture.series]
    together = "  ".join(legend)
    return [*lines, together] if len(together) <= width else [*lines, *legend]


def _station(series: Sequence[Series], place: int, scale: Scale) -> str:
    cells = [" "] * scale.width
    signal = next((one.values[place] for one in series if one.look == "signal"), None)
    noise = next((one.values[place] for one in series if one.look == "noise"), None)
    if signal is not None and noise is not None:
        low, high = sorted((scale.column(signal), scale.column(noise)))
        cells[low : high + 1] = "─" * (high + 1 - low)
    for one in reversed(series):
        value = one.values[place]
        if value is not None:
            cells[scale.column(value)] = SIGNS[one.look]
    return "".join(cells)


# Contributions: a row a position


def bar_lines(picture: ContributionBars, width: int) -> list[str]:
    """Return one line a contribution: its name, its part, and a bar of that length."""
    text = max(len(bar.text) for bar in picture.bars)
    names = [_short(bar.name, width - text - 4 - _LEAST_PLOT) for bar in picture.bars]
    wide = max(map(len, names))
    room = max(width - wide - text - 4, _LEAST_PLOT)
    most = max(bar.part for bar in picture.bars) or 1.0
    return [
        f"{name.ljust(wide)}  {bar.text.rjust(text)}  {_bar(max(bar.part, 0.0) / most * room)}".rstrip()
        for name, bar in zip(names, picture.bars, strict=True)
    ]


def _bar(length: float) -> str:
    eighths = round(length * 8)
    return "█" * (eighths // 8) + _EIGHTHS[eighths % 8].strip()


# Distribution: columns of a histogram over the axis of margins


def distribution_lines(picture: Distribution, width: int) -> list[str]:
    """Return a histogram, the limit marked on the axis below, and what the marks say."""
    scale = Scale(*picture.span, width=width)
    heights = column_heights(picture, scale)
    lines = [
        "".join(_HEIGHTS[min(max(height - 8 * level, 0), 8)] for height in heights).rstrip()
        for level in reversed(range(_TALL))
    ]
    axis = ["─"] * width
    ends = rounded(scale.low), f"{rounded(scale.high)} {picture.unit}"
    told = [f"  {mark.text}" for mark in picture.marks]
    if not picture.shows_limit:
        far, side = (picture.edges[0], "left") if picture.edges[0] > 0 else (picture.edges[-1], "right")
        told.append(f"  the limit is {rounded(abs(far))} {picture.unit} further to the {side}")
    else:
        axis[scale.column(0.0)] = "┼"
        told.append("  ┼ limit, margin 0")
    return [*lines, "".join(axis), ends[0] + ends[1].rjust(width - len(ends[0])), *told]


def column_heights(picture: Distribution, scale: Scale) -> list[int]:
    """Return the height of each column in eighths of a line: counts shared out over the columns they cover."""
    step = (scale.high - scale.low) / scale.width
    sums = [
        _density(picture, scale.low + at * step, scale.low + (at + 1) * step) for at in range(scale.width)
    ]
    most = max(sums) or 1.0
    return [max(round(one / most * 8 * _TALL), 1) if one > 0 else 0 for one in sums]


def _density(picture: Distribution, low: float, high: float) -> float:
    return sum(_parts(picture, low, high))


def _parts(picture: Distribution, low: float, high: float) -> Iterator[float]:
    for count, start, end in zip(picture.counts, picture.edges, picture.edges[1:], strict=False):
        overlap = min(end, high) - max(start, low)
        if count and end > start and overlap > 0:
            yield count * overlap / (end - start)
        elif count and end == start and low <= start < high:
            yield float(count)
