"""Picture → inline SVG, drawn from the data of the picture alone: no script, no font and no address from elsewhere.

Every drawing says in words what is to be seen (``title`` and ``desc``), and no meaning rests on colour alone: lines
differ in dashes and marks, bars and columns carry their figures.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from html import escape
from itertools import pairwise

from specflow.exporters.svg_parts import GOOD, INK, QUIET, WIDTH, stroke, text, ticks
from specflow.exporters.svg_trace import trace_parts
from specflow.model.picture import (
    ContributionBars,
    Distribution,
    LevelDiagram,
    Mark,
    Picture,
    Series,
    TracePicture,
)

COLOURS = {"signal": "#22577a", "noise": "#8a5a2b", "bound": "#6b7780"}
BAD = "#c0583c"
_FONT = 'font-family="system-ui, sans-serif" font-size="12"'
_CHARACTER = 6.4  # mean width in px of a character at that size
_HALO = ' stroke="#fff" stroke-width="3" paint-order="stroke"'  # text that crosses a line stays readable
_Place = Callable[[int], float]
_Value = Callable[[float], float]


def svg(picture: Picture, name: str) -> str:
    """Return the drawing as markup; ``name`` is an id that no other drawing of the page has."""
    match picture:
        case LevelDiagram():
            height, parts = _levels(picture)
        case ContributionBars():
            height, parts = _bars(picture)
        case Distribution():
            height, parts = _distribution(picture)
        case TracePicture():
            height, parts = trace_parts(picture)
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" role="img" viewBox="0 0 {WIDTH} {height}" width="{WIDTH}" '
        f'height="{height}" {_FONT} fill="{INK}" aria-labelledby="{name}-title {name}-desc">'
        f'<title id="{name}-title">{escape(picture.title)}</title>'
        f'<desc id="{name}-desc">{escape(picture.words)}</desc>{"".join(parts)}</svg>'
    )


# Levels


_NUMBER = 44  # px that a number takes
_TOP, _LEFT, _RIGHT, _PLOT = 40, 58, 44, 250


def _levels(picture: LevelDiagram) -> tuple[int, list[str]]:
    low, high = picture.span
    room = 0.08 * (high - low)
    low, high = low - room, high + room
    across = (WIDTH - _LEFT - _RIGHT) / max(len(picture.stations) - 1, 1)

    def x(place: int) -> float:
        return _LEFT + place * across

    def y(value: float) -> float:
        return _TOP + (high - value) / (high - low) * _PLOT

    longest = max(len(name) for name in picture.stations)
    slanted = longest * _CHARACTER > across - 6
    turn = 0 if not slanted else 38 if across > 40 else 62  # degrees
    below = 30 + (min(longest, 28) * _CHARACTER * math.sin(math.radians(turn)) if slanted else 12)
    parts = [_legend(picture)]
    for value in ticks(low, high):
        parts.append(stroke(_LEFT, y(value), WIDTH - _RIGHT, y(value)))
        parts.append(text(_LEFT - 8, y(value) + 4, f"{value:g}", "end", QUIET))
    for place, name in enumerate(picture.stations):
        parts.append(stroke(x(place), _TOP, x(place), _TOP + _PLOT + 4))
        parts.append(_station_name(x(place), _TOP + _PLOT + 18, name, turn))
    for one in reversed(picture.series):
        parts.extend(_series(one, x, y, every=max(1, math.ceil(_NUMBER / across))))
    return round(_TOP + _PLOT + below), parts


def _station_name(x: float, y: float, name: str, turn: int) -> str:
    shown = name if len(name) <= 28 else name[:27] + "…"
    if not turn:
        return text(x, y, shown, "middle")
    return text(x + 4, y, shown, "end", INK, f' transform="rotate(-{turn} {x + 4:.1f} {y:.1f})"')


def _legend(picture: LevelDiagram) -> str:
    parts = [text(_LEFT - 8, 16, picture.unit, "end", QUIET)]
    x = float(_LEFT)
    for one in picture.series:
        parts.append(stroke(x, 12, x + 26, 12, COLOURS[one.look], _dashes(one)))
        parts.append(_mark(one, x + 13, 12))
        parts.append(text(x + 32, 16, one.name, "start", COLOURS[one.look]))
        x += 58 + len(one.name) * _CHARACTER
    return "".join(parts)


def _dashes(one: Series) -> str:
    dashes = {"signal": "", "noise": ' stroke-dasharray="6 4"', "bound": ' stroke-opacity="0"'}
    return f' stroke-width="2"{dashes[one.look]}'


def _mark(one: Series, x: float, y: float) -> str:
    colour = COLOURS[one.look]
    match one.look:
        case "signal":
            return f'<circle cx="{x:.1f}" cy="{y:.1f}" r="3.5" fill="{colour}"/>'
        case "noise":
            return (
                f'<rect x="{x - 3:.1f}" y="{y - 3:.1f}" width="6" height="6" fill="#fff" stroke="{colour}"/>'
            )
    return f'<path d="M{x - 11:.1f} {y:.1f}h22" stroke="{colour}" stroke-width="2.5"/>'


def _series(one: Series, x: _Place, y: _Value, *, every: int) -> Iterator[str]:
    """Draw a line with its marks; numbers stand at each of them, or where they are close at ``every`` so many."""
    known = [(place, value) for place, value in enumerate(one.values) if value is not None]
    for (place, value), (after, next_value) in pairwise(known):
        if after == place + 1 and one.look != "bound":
            yield stroke(x(place), y(value), x(after), y(next_value), COLOURS[one.look], _dashes(one))
    for place, value in known:
        yield _mark(one, x(place), y(value))
        if every == 1:
            yield _label(one, place, x, y)
        elif one.look != "bound" and (
            place % every == 0 or (place == known[-1][0] and place % every > every // 2)
        ):
            up = 17 if one.look == "noise" else -8
            anchor = "middle" if place else "start"
            yield text(x(place), y(value) + up, one.texts[place], anchor, COLOURS[one.look], _HALO)


def _label(one: Series, place: int, x: _Place, y: _Value) -> str:
    """Write a value on the side of its line that the line does not take."""
    value = one.values[place] or 0.0
    before = one.values[place - 1] if place else None
    after = one.values[place + 1] if place + 1 < len(one.values) else None
    rises = (after if after is not None else value) - (before if before is not None else value)
    at, height, colour = x(place), y(value), COLOURS[one.look]
    below = one.look == "noise"
    anchor = "end" if (rises > 0) != below else "start"
    if before is None and place == 0:
        anchor = "start"
    if after is None and place == len(one.values) - 1:
        anchor = "end"
    aside = -6 if anchor == "end" else 6
    return text(at + aside, height + (17 if below else -8), one.texts[place], anchor, colour, _HALO)


# Contributions


_ROW = 24


def _bars(picture: ContributionBars) -> tuple[int, list[str]]:
    names = [bar.name if len(bar.name) <= 34 else bar.name[:33] + "…" for bar in picture.bars]
    left = max(len(name) for name in names) * _CHARACTER + 16
    room = WIDTH - left - 70
    most = max(max(bar.part for bar in picture.bars), 1e-12)
    parts = []
    for row, (name, bar) in enumerate(zip(names, picture.bars, strict=True)):
        y = row * _ROW + 6
        length = max(bar.part, 0.0) / most * room
        parts.append(text(left - 8, y + 13, name, "end"))
        parts.append(
            f'<rect x="{left:.1f}" y="{y}" width="{length:.1f}" height="{_ROW - 7}" fill="{COLOURS["signal"]}"/>'
        )
        parts.append(text(left + length + 6, y + 13, bar.text, "start"))
    parts.append(stroke(left, 2, left, len(names) * _ROW + 4, QUIET))
    return len(names) * _ROW + 12, parts


# Distribution


_SIDE, _TALL = 24, 190


def _distribution(picture: Distribution) -> tuple[int, list[str]]:
    low, high = picture.span
    room = 0.03 * (high - low)
    low, high = low - room, high + room
    top = 26 + 16 * len(picture.marks)
    bottom = top + _TALL

    def x(value: float) -> float:
        return _SIDE + (value - low) / (high - low) * (WIDTH - 2 * _SIDE)

    parts = list(_columns(picture, x, bottom))
    parts.append(stroke(_SIDE, bottom, WIDTH - _SIDE, bottom, QUIET))
    for value in ticks(low, high, 10):
        parts.append(stroke(x(value), bottom, x(value), bottom + 5, QUIET))
        parts.append(text(x(value), bottom + 19, f"{value:g}", "middle", QUIET))
    parts.append(text(WIDTH / 2, bottom + 38, f"worst margin of a specimen, {picture.unit}", "middle", QUIET))
    parts.extend(_limit(picture, x, bottom))
    for row, mark in enumerate(sorted(picture.marks, key=lambda one: one.at)):
        parts.extend(_marked(mark, x(mark.at), 32 + 16 * row, bottom))
    return bottom + 48, parts


def _limit(picture: Distribution, x: _Value, bottom: float) -> Sequence[str]:
    if picture.shows_limit:
        return [
            stroke(x(0.0), 18, x(0.0), bottom, BAD, ' stroke-width="2"'),
            _beside(x(0.0), 14, "limit", BAD),
        ]
    if picture.edges[0] > 0:
        return [text(_SIDE, 14, f"← limit, {picture.edges[0]:.3g} {picture.unit} away", "start", BAD)]
    far = f"limit, {-picture.edges[-1]:.3g} {picture.unit} away →"
    return [text(WIDTH - _SIDE, 14, far, "end", BAD)]


def _columns(picture: Distribution, x: _Value, bottom: float) -> Iterator[str]:
    most = max(max(picture.counts), 1)
    for count, start, end in zip(picture.counts, picture.edges, picture.edges[1:], strict=False):
        if count == 0:
            continue
        tall = max(count / most * (_TALL - 6), 0.8)
        wide = max(x(end) - x(start) - 0.6, 0.8)
        fill = BAD if end <= 0 else GOOD
        yield (
            f'<rect x="{x(start):.1f}" y="{bottom - tall:.1f}" width="{wide:.1f}" height="{tall:.1f}" fill="{fill}">'
            f"<title>{count} from {start:.4g} to {end:.4g} {escape(picture.unit)}</title></rect>"
        )


def _marked(mark: Mark, x: float, y: float, bottom: float) -> Sequence[str]:
    return [
        stroke(x, y - 8, x, bottom, QUIET, ' stroke-dasharray="3 3"'),
        _beside(x, y, mark.text, INK),
    ]


def _beside(x: float, y: float, words: str, fill: str) -> str:
    """Write words beside a line, on the side where there is room."""
    fits = x + 6 + len(words) * _CHARACTER < WIDTH
    return text(x + 5, y, words, "start", fill) if fits else text(x - 5, y, words, "end", fill)
