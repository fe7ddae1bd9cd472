"""What is drawn: the margin bar to scale, the proof grid in the room there is, the tree filtered."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.model.card import BarAxis, MarginBar, PointState, ProofCell, ProofGrid, TrailStep
from specflow.model.origin import Origin
from specflow.model.outline import OutlineEntry
from specflow.tui.tones import POINT_MARKS, POINT_STYLES
from specflow.tui.widgets.fact_list import fact_lines
from specflow.tui.widgets.margin_bar import GUARD, LEFT, LIMIT, OUTSIDE, POINT, RIGHT, Scale, bar_lines
from specflow.tui.widgets.proof_grid import Layout, Place, _header, _row_title
from specflow.tui.widgets.requirement_tree import visible
from specflow.tui.widgets.trail import trail_lines

LOWER = MarginBar(unit="dBm", lower=30.0, guard=1.0, least=29.0, greatest=33.0, lower_text="30 dBm",
                  least_text="29 dBm", greatest_text="33 dBm", words="results 29 to 33 dBm")  # fmt: skip


def plain(bar: MarginBar, width: int = 41) -> list[str]:
    return [line.plain for line in bar_lines(bar, width)]


def test_what_lies_outside_a_lower_limit_is_hatched_and_the_guard_band_stands_inside() -> None:
    limit, results, numbers, words = plain(LOWER)
    assert limit.lstrip(OUTSIDE).startswith(LIMIT + GUARD)
    assert limit.index(LIMIT) > results.index(LEFT), "the spread begins outside the limit"
    assert "30 dBm" in numbers and "33 dBm" in numbers
    assert words == "results 29 to 33 dBm"


def test_an_upper_limit_is_the_mirror_image() -> None:
    bar = MarginBar(unit="dB", upper=-30.0, guard=1.0, least=-33.0, greatest=-29.0, upper_text="-30 dB")
    limit, results, *_ = plain(bar)
    assert limit.rstrip(OUTSIDE).endswith(GUARD + LIMIT)
    assert limit.index(LIMIT) < results.index(RIGHT)
    lower = plain(LOWER)[0]
    swapped = "".join(reversed(limit))
    assert swapped.count(OUTSIDE) == lower.count(OUTSIDE) and swapped.count(GUARD) == lower.count(GUARD)


def test_two_limits_leave_what_is_allowed_between_them() -> None:
    bar = MarginBar(
        unit="dB", lower=-1.0, upper=1.0, least=0.0, greatest=0.0, lower_text="-1 dB", upper_text="1 dB"
    )
    limit, results, *_ = plain(bar)
    assert limit.startswith(OUTSIDE) and limit.endswith(OUTSIDE) and limit.count(LIMIT) == 2
    assert limit.index(LIMIT) < results.index(POINT) < limit.rindex(LIMIT)


@given(st.floats(-1e6, 1e6), st.floats(0, 1e3), st.floats(-1e6, 1e6), st.floats(0, 1e6), st.integers(20, 200))
def test_every_line_fits_and_order_on_the_axis_is_kept(
    lower: float, guard: float, least: float, spread: float, width: int
) -> None:
    bar = MarginBar(
        axis=BarAxis.MARGIN, unit="dB", lower=lower, guard=guard, least=least, greatest=least + spread,
        lower_text="limit", least_text=f"{least:.2f} dB", greatest_text=f"{least + spread:.2f} dB",
    )  # fmt: skip
    assert all(len(line) <= width for line in plain(bar, width)[:3])
    scale = Scale(bar, width)
    places = [scale.cell(value) for value in sorted([lower, lower + guard, least, least + spread])]
    assert places == sorted(places) and 0 <= places[0] <= places[-1] < width


def test_a_bar_of_a_single_value_can_be_drawn() -> None:
    assert POINT in plain(MarginBar(unit="dB", least=0.0, greatest=0.0))[1]


def cell(state: PointState = PointState.PROVED, margin: str = "+0.40 dB") -> ProofCell:
    return ProofCell(words="a point", state=state, value="1 dB", margin=margin)


def grid(rows: int, columns: int) -> ProofGrid:
    return ProofGrid(
        row_titles=tuple(f"+{row} °C ambient" for row in range(rows)),
        column_titles=tuple(f"{column} GHz" for column in range(columns)),
        cells=tuple(tuple(cell() for _ in range(columns)) for _ in range(rows)),
    )


def test_margins_stand_in_the_cells_where_there_is_room() -> None:
    assert Layout.of(grid(3, 3), 66).cell == len("+0.40 dB") + 4
    assert Layout.of(grid(3, 3), 40).cell == 3, "the mark alone, with room for the cursor's brackets"


def test_columns_that_do_not_fit_are_scrolled_to() -> None:
    wide = grid(2, 40)
    layout = Layout.of(wide, 60)
    assert layout.columns < 40 and layout.first(wide, Place(0, 0)) == 0
    for column in range(40):
        first = layout.first(wide, Place(1, column))
        assert first <= column < first + layout.columns
    assert "more)" in _header(wide, layout, Place(0, 0))[0].plain


def test_a_single_row_is_folded_and_loses_nothing() -> None:
    listed = ProofGrid(cells=(tuple(cell() for _ in range(100)),))
    layout = Layout.of(listed, 40)
    assert layout.folded and layout.row_lines * layout.columns >= 100


@given(st.integers(1, 12), st.integers(1, 60), st.integers(20, 120))
def test_no_line_of_a_grid_is_wider_than_the_room(rows: int, columns: int, width: int) -> None:
    made = grid(rows, columns)
    layout = Layout.of(made, width)
    assert layout.title + layout.columns * layout.cell <= width
    assert all(len(line) <= width for line in _header(made, layout, Place(0, columns - 1)))


def test_row_titles_say_what_differs_from_the_row_above() -> None:
    made = ProofGrid(
        row_titles=("-25 °C, θ 0°, φ 0°", "-25 °C, θ 30°, φ 0°", "-25 °C, θ 30°, φ 90°", "23 °C, θ 0°, φ 0°")
    )
    assert [_row_title(made, row) for row in range(4)] == [
        "-25 °C, θ 0°, φ 0°",
        "θ 30°, φ 0°",
        "φ 90°",
        "23 °C, θ 0°, φ 0°",
    ]


def test_every_state_of_a_point_has_a_mark_of_its_own() -> None:
    assert set(POINT_MARKS) == set(POINT_STYLES) == set(PointState)
    assert len(set(POINT_MARKS.values())) == len(PointState)


TREE = (
    OutlineEntry(id="A", title="system", depth=0, label="planned", is_open=True),
    OutlineEntry(id="A1", title="gain", depth=1, label="failing", is_open=True),
    OutlineEntry(id="A11", title="stage", depth=2, label="closed - verified"),
    OutlineEntry(title="LNA", depth=0),
    OutlineEntry(id="B", title="gain", depth=1, label="closed - verified"),
)


@pytest.mark.parametrize(
    ("words", "open_only", "expected"),
    [
        ("", False, ["A", "A1", "A11", "LNA", "B"]),
        ("gain", False, ["A", "A1", "LNA", "B"]),
        ("STAGE", False, ["A", "A1", "A11"]),
        ("gain failing", False, ["A", "A1"]),
        ("", True, ["A", "A1"]),
        ("stage", True, []),
        ("lna", False, []),
    ],
)
def test_a_filter_keeps_hits_and_what_they_stand_under(
    words: str, open_only: bool, expected: list[str]
) -> None:
    assert [entry.id or entry.title for entry in visible(TREE, words, open_only)] == expected


def test_long_facts_are_folded_under_themselves() -> None:
    lines = [line.plain for line in fact_lines((("Name", "one two three four"),), 6, 16)]
    assert lines[0].startswith("Name  one") and all(line.startswith("      ") for line in lines[1:])
    assert " ".join(" ".join(lines).split()) == "Name one two three four"


def test_the_cell_of_a_trail_stands_on_a_line_of_its_own() -> None:
    steps = (
        TrailStep(depth=-1, kind="requirement", id="SYS", text="system"),
        TrailStep(depth=0, kind="requirement", id="R", text="own"),
        TrailStep(
            depth=2, kind="point", text="a point", origin=Origin(file="a.xlsx", sheet="S", row=9, column=4)
        ),
    )
    assert [line.plain for line in trail_lines(steps, 60)] == [
        "↑ SYS system",
        "  ◆ R own",
        "      └ a point",
        "        a.xlsx · S · D9",
    ]
