"""Mappings: proposed with reasons, read strictly, recognised by the layout and not by the name of the file."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.errors import FileError
from specflow.importers.measured.mapping import ColumnMapping, LayoutMapping, read_mappings, write_mapping
from specflow.model.evidence import TableMapping
from tests.importers.measured.make import book, low, measure, one_table, questions, taken

UNCLEAR = [["f (GHz)", "T (°C)", "G", "Odd"], [27.5, 23, 20, 7]]
SETTLED = """
format = 1
[[table]]
block = "LNA"
item = "LNA-1"
[[table.column]]
header = "T (°C)"
dimension = "temperature_case"
[[table.column]]
column = "C"
parameter = "gain"
unit = "dB"
plane = "input to output"
[[table.column]]
header = "Odd"
role = "not read"
"""


def test_a_mapping_settles_what_was_unclear(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", UNCLEAR)
    assert questions(one_table(path, stated={}))
    table = taken(one_table(path, stated={}, mapping=SETTLED, mapping_name="m.toml"))
    assert low(table, "G") == [20] and table.mapping_from == "the mapping file m.toml"
    assert table.document is not None and table.columns is not None
    value = table.document.values[0]
    assert (value.unit, value.unit_from, value.quantity.plane) == ("dB", "the mapping", "input to output")
    assert "temperature_case" in table.columns.conditions.numeric


def test_a_stored_mapping_is_recognised_by_the_layout(tmp_path: Path) -> None:
    first = taken(one_table(book(tmp_path / "a.xlsx", UNCLEAR), stated={}, mapping=SETTLED))
    stored = TableMapping(id="MAP-1", layout_key=first.layout_key, toml=first.mapping)
    later = book(tmp_path / "quite another name.xlsx", [["A later one"], *UNCLEAR, [28, 23, 21, 7]])
    table = taken(one_table(later, stored, stated={}))
    assert low(table, "G") == [20, 21]
    assert table.mapping_from == "MAP-1 revision 1, recognised by its layout"
    other = book(tmp_path / "b.xlsx", [["f (GHz)", "T (°C)", "Odd", "G"], [27.5, 23, 20, 7]])
    assert questions(one_table(other, stored, stated={}))  # another order is another layout


def test_the_key_of_a_layout(tmp_path: Path) -> None:
    def key(rows: list[list[object]], sheet: str = "Run 1") -> str:
        return one_table(book(tmp_path / "a.xlsx", rows, sheet=sheet)).layout_key

    rows: list[list[object]] = [["f (GHz)", "Gain (dB)"], [27.5, 20]]
    assert key(rows) == key([["title"], ["F [GHz]", "gain  (dB)"], [1, 2], [3, 4]], "Run 23")
    assert key(rows) != key([["f (MHz)", "Gain (dB)"], [27.5, 20]])
    assert key(rows) != key(rows, "Summary")


def test_the_proposal_is_a_mapping_that_says_the_same(tmp_path: Path) -> None:
    rows = [
        ["Gain (invented)"],
        ["Item", "f (GHz)", "Gain (dB)", "U (dB), k=2", "Remark"],
        ["LNA-1", 27.5, 20, 0.8, "x"],
    ]
    path = book(tmp_path / "a.xlsx", rows)
    read = measure(path, stated={})
    assert "# C2: gain, in dB; the header is the key 'gain' of gain; unit from the header C2" in read.proposal
    again = taken(one_table(path, stated={}, mapping=read.proposal))
    assert again.document is not None and read.tables[0].document is not None
    quantities = [value.quantity for value in again.document.values]
    assert quantities == [value.quantity for value in read.tables[0].document.values]
    assert again.columns is not None and list(again.columns.values["Gain"].u or ()) == [0.4]


def test_the_proposal_says_what_is_to_be_settled(tmp_path: Path) -> None:
    proposal = measure(book(tmp_path / "a.xlsx", UNCLEAR), stated={}).proposal
    assert proposal.count("TO SETTLE") == 3
    assert tomllib.loads(proposal)["table"][0]["layout"].startswith("L-")


def test_a_layout_may_be_skipped(tmp_path: Path) -> None:
    read = measure(book(tmp_path / "a.xlsx", UNCLEAR), mapping="format = 1\n[[table]]\nskip = true\n")
    assert read.tables == () and "says skip" in read.skipped[0]


def test_where_mapping_and_file_disagree_neither_is_believed(tmp_path: Path) -> None:
    rows = [["Ambient: 45 °C"], ["f (GHz)", "Gain (dB)"], [27.5, 20]]
    path = book(tmp_path / "a.xlsx", rows)
    mapping = 'format = 1\n[[table]]\n[table.stated]\ntemperature_ambient = "23 °C"\n'
    asked = questions(one_table(path, mapping=mapping))
    assert "the mapping says 23 °C, the file says 45 °C" in asked
    said = {"block": "LNA", "item": "LNA-1", "temperature_ambient": "45 °C"}
    assert taken(one_table(path, mapping=mapping, stated=said))


def test_a_pivot_reads_conditions_from_headers(tmp_path: Path) -> None:
    rows = [["T_amb (°C)", "Gain @ 27.5 GHz (dB)", "Gain @ 30 GHz (dB)"], [-40, 20, "<18"], [85, 19, 17]]
    path = book(tmp_path / "a.xlsx", rows)
    by_itself = taken(one_table(path))
    assert by_itself.columns is not None
    assert list(by_itself.columns.conditions.numeric["frequency"]) == [27.5, 27.5, 30, 30]
    mapping = (
        'format = 1\n[[table]]\n[table.pivot]\nheader = "Gain @ {frequency} GHz (dB)"\nparameter = "gain"\n'
        'unit = "dB"\nunits = { frequency = "GHz" }\n'
    )
    table = taken(one_table(path, mapping=mapping))
    assert table.columns is not None
    conditions = table.columns.conditions
    assert list(conditions.numeric["frequency"]) == [27.5, 27.5, 30, 30]
    assert list(conditions.numeric["temperature_ambient"]) == [-40, 85, -40, 85]
    assert list(table.columns.values["gain"].high) == [20, 19, 18, 17]
    assert [table.columns.extra["source column"].word(row) for row in range(4)] == ["B", "B", "C", "C"]
    without = mapping.replace('units = { frequency = "GHz" }\n', "")
    assert "states no unit of frequency" in questions(one_table(path, mapping=without))


@pytest.mark.parametrize(
    ("toml", "words"),
    [
        ("format = 1\n[[table]\n", "no TOML"),
        ("format = 2\n[[table]]\n", "another format"),
        ("format = 1\n", "no [[table]]"),
        ('format = 1\n[[table]]\nblok = "LNA"\n', "'blok' is not known"),
        ('format = 1\n[[table]]\n[[table.column]]\nrole = "value"\n', "names no column"),
        ('format = 1\n[[table]]\n[[table.column]]\nheader = "x"\nrole = "valve"\n', "'valve' is no role"),
        ('format = 1\n[[table]]\n[[table.column]]\nheader = "x"\nk = "two"\n', "k = 'two'"),
        ('format = 1\n[[table]]\n[table.pivot]\nheader = "x"\n', "no parameter"),
        (
            'format = 1\n[[table]]\n[table.pivot]\nheader = "{1}"\nparameter = "gain"\nunit = "dB"\n',
            "dimensions",
        ),
        ('format = 1\n[[table]]\n[[table.column]]\nheader = "x"\nspectrum = "noisy"\n', "'noisy' is no kind"),
        ("format = 1\n[[table]]\ncolumns = []\n", "'columns' is not known"),
        ("format = 1\ntable = [1]\n", "no list of entries"),
        ("format = 1\n[[table]]\n[table.column]\n", "no list of entries"),
        ("format = 1\n[[table]]\nstated = 3\n", "no group of words"),
        ('format = 1\n[[table]]\nskip = "yes"\n', "skip = 'yes'"),
        ("format = 1\n[[table]]\nheader_rows = 0\n", "header_rows = 0"),
    ],
)
def test_a_faulty_mapping_is_refused_with_its_place(toml: str, words: str) -> None:
    with pytest.raises(FileError) as caught:
        read_mappings(toml, "m.toml")
    assert words in caught.value.message and "m.toml" in caught.value.where and caught.value.hint


def test_what_of_a_mapping_is_not_used_is_said(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", [["f (GHz)", "Gain (dB)"], [27.5, 20]])
    mapping = 'format = 1\n[[table]]\n[[table.column]]\nheader = "Gian (dB)"\nrole = "not read"\n'
    table = taken(one_table(path, mapping=mapping))
    assert "the mapping speaks of a column 'Gian (dB)' that is not there" in table.notes
    other = measure(
        path, mapping='format = 1\n[[table]]\nlayout = "L-0"\nblock = "PA"\n', mapping_name="m.toml"
    )
    assert "m.toml settles the layout L-0, which no table of this file has" in other.findings[0].message
    said = {"block": "LNA", "item": "LNA-1", "column Z": "gain"}
    assert (
        "there is no column 'Z', of which something was stated" in taken(one_table(path, stated=said)).notes
    )


def test_a_parameter_that_is_unknown_is_named_with_the_nearest(tmp_path: Path) -> None:
    mapping = 'format = 1\n[[table]]\n[[table.column]]\nheader = "G"\nparameter = "gian"\nunit = "dB"\n'
    asked = questions(one_table(book(tmp_path / "a.xlsx", [["f (GHz)", "G"], [27.5, 20]]), mapping=mapping))
    assert "'gian'" in asked and "gain" in asked


names = st.text(st.characters(exclude_categories=["Cs"]), min_size=1, max_size=12).filter(str.strip)


@settings(deadline=None)
@given(names, names, st.booleans(), st.none() | st.floats(0.5, 4))
def test_what_is_written_reads_back(header: str, stated: str, fill: bool, k: float | None) -> None:
    column = ColumnMapping(header=header, role="uncertainty", unit="dB", k=k, fill_down=fill)
    mapping = LayoutMapping("L-1", title=header, header_rows=2, stated={"set_up": stated}, columns=(column,))
    assert read_mappings("format = 1\n" + write_mapping(mapping), "m") == (mapping,)


def test_lists_nested_without_end_are_refused() -> None:
    with pytest.raises(FileError, match="is no TOML"):
        read_mappings("a = " + "[" * 5000 + "]" * 5000, "deep.toml")
