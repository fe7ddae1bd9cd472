"""A trace as lines of plain text: a row of letters a line of readings, dashes for the limit, on one grid."""

from __future__ import annotations

from specflow.model.picture import TraceLine, TracePicture
from specflow.reports.figures import rounded

_TALL = 10
_LETTERS = "abcdefghijklmnop"


def trace_lines(picture: TracePicture, width: int) -> list[str]:
    """Return the trace, at most ``width`` wide: letters of the lines, dashes for the limit, and a legend."""
    low, high = picture.span
    ends = [f"{rounded(high, 2)} {picture.unit}", f"{rounded(low, 2)} {picture.unit}"]
    left = max(map(len, ends)) + 1
    wide = max(width - left - 1, 16)
    cells = [[" "] * wide for _ in range(_TALL)]
    readings = [line for line in picture.lines if line.look == "reading"]
    for line in (one for one in picture.lines if one.look == "bound"):
        _put(cells, line, picture, "╌")
    for number, line in enumerate(readings):
        _put(cells, line, picture, _LETTERS[number % len(_LETTERS)] if len(readings) > 1 else "•")
    for mark in picture.marks:
        row, column = _place(mark.x, mark.y, picture, wide)
        cells[row][column] = "◆"
    lines = []
    for row, cell in enumerate(cells):
        label = ends[0] if row == 0 else ends[1] if row == _TALL - 1 else ""
        lines.append(f"{label.rjust(left)}│{''.join(cell)}".rstrip())
    first, last = (rounded(end, 3) for end in picture.across)
    axis = f"{first}".ljust(wide - len(last) - len(picture.axis_unit) - 1) + f"{last} {picture.axis_unit}"
    lines += [" " * left + "└" + "─" * wide, " " * (left + 1) + axis]
    return [*lines, *_legend(picture, readings, width)]


def _legend(picture: TracePicture, readings: list[TraceLine], width: int) -> list[str]:
    told = [
        f"{_LETTERS[number % len(_LETTERS)] if len(readings) > 1 else '•'} {line.name}"
        for number, line in enumerate(readings)
    ]
    told += [f"╌ {line.name}" for line in picture.lines if line.look == "bound"]
    told += [f"◆ {mark.text}" for mark in picture.marks]
    return [one if len(one) <= width else one[: width - 1] + "…" for one in told]


def _put(cells: list[list[str]], line: TraceLine, picture: TracePicture, sign: str) -> None:
    wide = len(cells[0])
    for (start, first), (end, second) in zip(
        zip(line.x, line.y, strict=True), zip(line.x[1:], line.y[1:], strict=True), strict=False
    ):
        steps = max(_place(end, second, picture, wide)[1] - _place(start, first, picture, wide)[1], 1)
        for step in range(steps):
            share = step / steps
            row, column = _place(
                start + share * (end - start), first + share * (second - first), picture, wide
            )
            cells[row][column] = sign
    row, column = _place(line.x[-1], line.y[-1], picture, wide)
    cells[row][column] = sign


def _place(x: float, y: float, picture: TracePicture, wide: int) -> tuple[int, int]:
    (left, right), (low, high) = picture.across, picture.span
    column = round((x - left) / (right - left) * (wide - 1))
    row = round((high - y) / (high - low) * (_TALL - 1))
    return min(max(row, 0), _TALL - 1), min(max(column, 0), wide - 1)
