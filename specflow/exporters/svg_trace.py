"""A trace as SVG: readings along an axis, the limit as a stepped dashed line, marks where something was derived."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from specflow.exporters.svg_parts import INK, QUIET, WIDTH, stroke, text, ticks
from specflow.model.picture import TraceLine, TracePicture

_TOP, _LEFT, _RIGHT, _PLOT = 30, 66, 30, 240
_COLOURS = ("#22577a", "#8a5a2b", "#5b7f3b", "#7a4a8a", "#3b7f7a", "#6b7780")
_DASHES = ("", "7 3", "2 3", "9 3 2 3", "4 4", "12 4")
_BOUND = "#c0583c"
_CHARACTER = 6.4
_Place = Callable[[float], float]


def trace_parts(picture: TracePicture) -> tuple[int, list[str]]:
    """Return the height and the parts of the drawing."""
    (left, right), (low, high) = picture.across, picture.span
    room = 0.08 * (high - low)
    low, high = low - room, high + room

    def x(place: float) -> float:
        return _LEFT + (place - left) / (right - left) * (WIDTH - _LEFT - _RIGHT)

    def y(value: float) -> float:
        return _TOP + (high - value) / (high - low) * _PLOT

    parts = [text(_LEFT - 8, 16, picture.unit, "end", QUIET)]
    for value in ticks(low, high):
        parts.append(stroke(_LEFT, y(value), WIDTH - _RIGHT, y(value)))
        parts.append(text(_LEFT - 8, y(value) + 4, f"{value:g}", "end", QUIET))
    for place in ticks(left, right, 10):
        parts.append(stroke(x(place), _TOP, x(place), _TOP + _PLOT + 4))
        parts.append(text(x(place), _TOP + _PLOT + 18, f"{place:g}", "middle", QUIET))
    parts.append(
        text(WIDTH - _RIGHT, _TOP + _PLOT + 34, f"{picture.axis} ({picture.axis_unit})", "end", QUIET)
    )
    readings = [line for line in picture.lines if line.look == "reading"]
    for number, line in enumerate(readings):
        parts.append(_drawn(line, x, y, _COLOURS[number % len(_COLOURS)], _DASHES[number % len(_DASHES)]))
    for line in picture.lines:
        if line.look == "bound":
            parts.append(_drawn(line, x, y, _BOUND, "5 3"))
    for mark in picture.marks:
        parts.append(f'<circle cx="{x(mark.x):.1f}" cy="{y(mark.y):.1f}" r="4" fill="none" stroke="{INK}"/>')
        anchor = "start" if x(mark.x) < WIDTH / 2 else "end"
        across = x(mark.x) + (7 if anchor == "start" else -7)
        halo = ' stroke="#fff" stroke-width="3" paint-order="stroke"'
        parts.append(text(across, y(mark.y) - 7, mark.text, anchor, INK, halo))
    names = list(_legend(picture, readings))
    parts += [part for _, drawn in names for part in drawn]
    return _TOP + _PLOT + 44 + 18 * (1 + max((row for row, _ in names), default=0)), parts


def _drawn(line: TraceLine, x: _Place, y: _Place, colour: str, dashes: str) -> str:
    points = " ".join(f"{x(place):.1f},{y(value):.1f}" for place, value in zip(line.x, line.y, strict=True))
    more = f' stroke-dasharray="{dashes}"' if dashes else ""
    if len(line.x) == 1:
        return f'<circle cx="{x(line.x[0]):.1f}" cy="{y(line.y[0]):.1f}" r="3" fill="{colour}"/>'
    return f'<polyline points="{points}" fill="none" stroke="{colour}" stroke-width="1.6"{more}/>'


def _legend(picture: TracePicture, readings: list[TraceLine]) -> Iterator[tuple[int, list[str]]]:
    """Give each line of the legend with its row; lines differ in dashes, not in colour alone."""
    across, row = float(_LEFT), 0
    for line in picture.lines:
        is_bound = line.look == "bound"
        number = 0 if is_bound else readings.index(line)
        colour = _BOUND if is_bound else _COLOURS[number % len(_COLOURS)]
        dashes = "5 3" if is_bound else _DASHES[number % len(_DASHES)]
        width = 44 + len(line.name) * _CHARACTER
        if across + width > WIDTH and across > _LEFT:
            across, row = float(_LEFT), row + 1
        down = _TOP + _PLOT + 50 + 18 * row
        more = f' stroke-width="2" stroke-dasharray="{dashes}"' if dashes else ' stroke-width="2"'
        yield (
            row,
            [
                stroke(across, down - 4, across + 26, down - 4, colour, more),
                text(across + 32, down, line.name),
            ],
        )
        across += width
