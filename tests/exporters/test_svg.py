"""Drawings: well-formed, said in words, harmless whatever a name holds, true to the data."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ElementTree

import pytest

from specflow.exporters import html
from specflow.exporters.svg import BAD, GOOD, svg, ticks
from specflow.model.picture import Bar, ContributionBars, Distribution, LevelDiagram, Mark, Picture, Series
from specflow.model.report import Report, ReportColumn, ReportPicture, ReportTable

NAMESPACE = "{http://www.w3.org/2000/svg}"
HOSTILE = '<script>alert("x")</script> & "quoted"'
LEVELS = LevelDiagram(
    title=HOSTILE,
    words="Level from -60.0 dBm to -40.0 dBm.",
    unit="dBm",
    stations=("input", "LNA", HOSTILE),
    series=(
        Series(name="level", values=(-60.0, -40.0, -45.0), texts=("-60.0", "-40.0", "-45.0")),
        Series(name="noise", values=(-110.0, -88.0, -92.0), texts=("-110.0", "-88.0", "-92.0"), look="noise"),
        Series(name="bound", values=(None, -10.0, None), texts=("–", "-10.0", "–"), look="bound"),
    ),
)
BARS = ContributionBars(
    title="Shares",
    words="w",
    bars=(Bar(name="A", part=0.75, text="75 %"), Bar(name=HOSTILE, part=0.25, text="25 %")),
)
NEAR = Distribution(
    title="Margin",
    words="w",
    unit="dB",
    edges=(-1.0, 0.0, 1.0, 2.0),
    counts=(10, 20, 5),
    marks=(Mark(at=0.5, text="half"),),
)
FAR = Distribution(title="Margin", words="w", unit="dB", edges=(90.0, 91.0, 92.0), counts=(1, 3))
PICTURES = (LEVELS, BARS, NEAR, FAR)


def drawn(picture: Picture) -> ElementTree.Element:
    return ElementTree.fromstring(svg(picture, "p1"))


def texts(picture: Picture) -> list[str]:
    return [one.text or "" for one in drawn(picture).iter(f"{NAMESPACE}text")]


@pytest.mark.parametrize("picture", PICTURES, ids=lambda one: one.kind)
def test_a_drawing_is_well_formed_and_says_in_words_what_is_to_be_seen(picture: Picture) -> None:
    root = drawn(picture)
    assert root.get("role") == "img" and root.get("aria-labelledby") == "p1-title p1-desc"
    assert root.findtext(f"{NAMESPACE}title") == picture.title
    assert root.findtext(f"{NAMESPACE}desc") == picture.words
    assert root.find(f"{NAMESPACE}title").get("id") == "p1-title"  # type: ignore[union-attr]


@pytest.mark.parametrize("picture", PICTURES, ids=lambda one: one.kind)
def test_nothing_is_drawn_outside_the_picture(picture: Picture) -> None:
    root = drawn(picture)
    _, _, width, height = map(float, (root.get("viewBox") or "").split())
    for one in root.iter(f"{NAMESPACE}rect"):
        x, y, wide, tall = (float(one.get(name, "0")) for name in ("x", "y", "width", "height"))
        assert min(x, y) >= 0 and x + wide <= width and y + tall <= height
    for one in root.iter(f"{NAMESPACE}circle"):
        assert 0 <= float(one.get("cx", "-1")) <= width and 0 <= float(one.get("cy", "-1")) <= height


def test_names_cannot_break_out_of_the_drawing() -> None:
    for picture in PICTURES:
        assert "<script" not in svg(picture, "p1")


def test_every_value_of_a_level_diagram_is_written_and_higher_is_further_up() -> None:
    said = texts(LEVELS)
    for one in LEVELS.series:
        assert all(
            text in said for text, value in zip(one.texts, one.values, strict=True) if value is not None
        )
    heights = [float(one.get("cy", "0")) for one in drawn(LEVELS).iter(f"{NAMESPACE}circle")][-3:]
    assert heights[1] < heights[2] < heights[0]


def test_a_long_chain_has_every_mark_but_not_every_number() -> None:
    values = tuple(float(place % 7) for place in range(41))
    long = LevelDiagram(
        title="t",
        words="w",
        unit="dBm",
        stations=tuple(f"Block {place}" for place in range(41)),
        series=(Series(name="level", values=values, texts=tuple(f"<{place}>" for place in range(41))),),
    )
    numbers = [text for text in texts(long) if text.startswith("<")]
    assert 10 <= len(numbers) <= 21 and "<0>" in numbers
    assert sum(1 for _ in drawn(long).iter(f"{NAMESPACE}circle")) == 41 + 1  # and the one of the legend


def test_bars_are_as_long_as_their_parts() -> None:
    first, second = (float(one.get("width", "0")) for one in drawn(BARS).iter(f"{NAMESPACE}rect"))
    assert first == pytest.approx(3 * second, rel=1e-2)


def test_what_fails_has_another_colour_and_stands_left_of_the_limit() -> None:
    columns = list(drawn(NEAR).iter(f"{NAMESPACE}rect"))
    assert [one.get("fill") for one in columns] == [BAD, GOOD, GOOD]
    assert "limit" in texts(NEAR)


def test_a_limit_far_away_is_said() -> None:
    assert "← limit, 90 dB away" in texts(FAR)


@pytest.mark.parametrize(
    ("low", "high", "found"),
    [
        (0, 10, [0, 2, 4, 6, 8, 10]),
        (-1.2, 0.9, [-1, -0.5, 0, 0.5]),
        (-120.8, -20, [-120, -100, -80, -60, -40, -20]),
    ],
)
def test_ticks_are_round(low: float, high: float, found: list[float]) -> None:
    assert ticks(low, high) == pytest.approx(found)


def test_the_page_draws_a_picture_above_its_table() -> None:
    table = ReportTable(key="t", title="T", columns=(ReportColumn(key="a", title="A"),), rows=())
    pictures = tuple(ReportPicture(table="t", picture=one) for one in PICTURES)
    page = html.render(Report(title="Invented", tables=(table,), pictures=pictures)).decode()
    assert page.count("<svg ") == len(PICTURES)
    assert page.index("<h2 id") < page.index("<svg ") < page.index("<table>")
    assert "<script" not in page
    names = re.findall(r'id="(picture-\d+-title)"', page)
    assert len(set(names)) == len(PICTURES)
