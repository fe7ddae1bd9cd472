from __future__ import annotations

from pathlib import Path

import numpy
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.importers.readers import Grid, open_grids
from specflow.importers.readers.delimiter import find_layout
from specflow.units import Reading, parse_reading
from tests.importers.readers.workbooks import refused


def grid_of(path: Path, content: str | bytes) -> Grid:
    path.write_bytes(content.encode() if isinstance(content, str) else content)
    return open_grids(path)[0]


@pytest.mark.parametrize("delimiter", [",", ";", "\t", "|", "  ", " \t "])
def test_fields_are_parted_by_what_parts_them(tmp_path: Path, delimiter: str) -> None:
    lines = [("f_GHz", "G_dB", "NF_dB"), ("1.5", "20.25", "0.8"), ("2.5", "-20", "1e-1")]
    grid = grid_of(tmp_path / "a.csv", "\n".join(delimiter.join(line) for line in lines) + "\n")
    assert grid.rows == [list(line) for line in lines]
    assert grid.column_floats(2, 2, 4)[0].tolist() == [20.25, -20.0]


@pytest.mark.parametrize("delimiter", [";", "\t"])
def test_decimal_commas_are_found(tmp_path: Path, delimiter: str) -> None:
    grid = grid_of(tmp_path / "a.csv", f"f{delimiter}G\n1,5{delimiter}20,25\n2{delimiter}-3,5\n")
    assert grid.decimal == ","
    assert grid.rows[1] == ["1,5", "20,25"]
    assert grid.column_floats(1, 2, 4)[0].tolist() == [1.5, 2.0]
    assert grid.column_floats(2, 2, 4)[0].tolist() == [20.25, -3.5]


def test_comma_that_may_stand_between_thousands_is_ambiguous(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", "f;G\n1,250;20\n2,500;30\n")
    assert grid.decimal == ""
    assert grid.column_floats(1, 2, 4)[1] == [2, 3]
    assert grid.column_floats(2, 2, 4)[0].tolist() == [20.0, 30.0]


@pytest.mark.parametrize("text", ["Gain\n12,5\n13,7\n", "f,G\n1,5,20,2\n2,5,21,3\n"])
def test_comma_as_separator_and_decimal_mark_is_refused(tmp_path: Path, text: str) -> None:
    (tmp_path / "a.csv").write_text(text)
    assert "part both the fields and the decimals" in refused(lambda: open_grids(tmp_path / "a.csv"))


def test_whole_numbers_under_their_own_titles_are_not_ambiguous(tmp_path: Path) -> None:
    assert grid_of(tmp_path / "a.csv", "run,state\n1,5\n2,7\n").rows[1] == ["1", "5"]


def test_header_and_body_may_have_different_separators(tmp_path: Path) -> None:
    header = "Frequency (GHz),    Hot Power (dB),  Cold Power (dB)\r\n"
    text = header + "0 \t -28.01 \t -28.9 \r\n0.04 \t -7.39 \t -7.39 \r\n"
    grid = grid_of(tmp_path / "a.dat", text)
    assert grid.rows == [
        ["Frequency (GHz)", "Hot Power (dB)", "Cold Power (dB)"],
        ["0", "-28.01", "-28.9"],
        ["0.04", "-7.39", "-7.39"],
    ]


@pytest.mark.parametrize("mark", [",", ";", "\t", "|"])
@pytest.mark.parametrize("delimiter", [",", "\t", ";", "  "])
def test_settings_above_the_table_may_have_another_separator(
    tmp_path: Path, mark: str, delimiter: str
) -> None:
    settings = "".join(f"{line}\n" for line in (f"Start{mark}10{mark}MHz", f"Stop{mark}20{mark}MHz"))
    body = [("f (MHz)", "P (dBm)"), ("10", "-20.5"), ("15", "-21"), ("20", "-22"), ("25", "-23")]
    table = "".join(delimiter.join(row) + "\n" for row in body)
    grid = grid_of(tmp_path / "a.csv", f"Sweep of Monday\n{settings}\n{table}")
    assert grid.rows[:3] == [["Sweep of Monday"], ["Start", "10", "MHz"], ["Stop", "20", "MHz"]]
    assert grid.rows[4:] == [list(row) for row in body]


def test_a_setting_with_a_decimal_comma_is_not_cut_at_it(tmp_path: Path) -> None:
    text = "Temp: 23,5 C\nOffset=-0,25\nDate: 3 May, 2026\nf (MHz),P (dBm)\n10,-20.5\n15,-21\n"
    grid = grid_of(tmp_path / "a.csv", text)
    assert grid.rows[:3] == [["Temp: 23,5 C"], ["Offset=-0,25"], ["Date: 3 May", "2026"]]


def test_a_second_section_may_have_another_separator(tmp_path: Path) -> None:
    text = "f,P\n1,2\n2,3\n3,4\n\nx;y\n1,5;2\n2,5;3\n"
    grid = grid_of(tmp_path / "a.csv", text)
    assert grid.rows[5:] == [["x", "y"], ["1,5", "2"], ["2,5", "3"]]
    assert grid.column_floats(1, 7, 9)[1] == [7, 8]


def test_header_with_commas_above_columns_of_blanks(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.dat", "freq, gain, phase\n 1.0   2.0   3.0\n 2.0   2.5   3.5\n")
    assert grid.rows[0] == ["freq", "gain", "phase"]


@pytest.mark.parametrize(
    "text", ["f (GHz),P\n27,5,45\n27,6,46\n27,7,47\n", "f,P,Q\n1,5,2,3\n2,5,3,1\n3,5,4,9\n"]
)
def test_more_whole_numbers_than_titles_may_be_decimal_commas(tmp_path: Path, text: str) -> None:
    (tmp_path / "a.csv").write_text(text)
    assert "part both the fields and the decimals" in refused(lambda: open_grids(tmp_path / "a.csv"))


def test_lines_of_two_encodings(tmp_path: Path) -> None:
    content = "T (°C),P (dBµV)\n25,3\n".encode() + "30,4,café\n".encode("cp1252")
    grid = grid_of(tmp_path / "a.csv", content)
    assert grid.rows == [["T (°C)", "P (dBµV)"], ["25", "3"], ["30", "4", "café"]]
    assert grid.notes == ("1 lines are not UTF-8, as others are; they were read as Windows-1252",)


def test_marks_inside_the_text_are_left_out_and_counted(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", b"\xef\xbb\xbff,P\n1,2\n\xef\xbb\xbf3,4\n")
    assert grid.rows[2] == ["3", "4"]
    assert grid.notes == ("1 byte-order marks inside the text were left out",)


def test_a_tab_may_be_named_by_the_separator_line(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", "sep=\t\nf\tP\n1.5\t2\n")
    assert (grid.comment_rows, grid.rows[1:]) == ({1}, [["f", "P"], ["1.5", "2"]])


@pytest.mark.parametrize(
    ("text", "decimal", "value"),
    [("1 234,5", ",", 1234.5), ("1'234.5", ".", 1234.5), ("1,234.5", ".", 1234.5), ("+1.5E+03", ".", 1500.0)],
)
def test_numbers_as_people_and_instruments_write_them(
    tmp_path: Path, text: str, decimal: str, value: float
) -> None:
    grid = grid_of(tmp_path / "a.csv", f"f;P\n{text};2\n{text};3\n")
    assert grid.decimal == decimal
    reading = parse_reading(str(grid.value(2, 1)), decimal_comma=decimal == ",")
    assert isinstance(reading, Reading)
    assert (reading.lo, reading.hi) == (value, value)


def test_header_words_among_runs_of_blanks(tmp_path: Path) -> None:
    grid = grid_of(
        tmp_path / "a.dat", "Antenna gain of run 3\nFreq (GHz)   Gain (dB)\n 1.0   20.5\n 2.0   21.5\n"
    )
    assert grid.rows == [
        ["Antenna gain of run 3"],
        ["Freq (GHz)", "Gain (dB)"],
        ["1.0", "20.5"],
        ["2.0", "21.5"],
    ]


def test_mark_carriage_returns_and_missing_last_newline(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", b"\xef\xbb\xbfTemperature,Resistance\r\n16.18,200.04\r\n17.26,200.05")
    assert grid.rows[0] == ["Temperature", "Resistance"]
    assert grid.rows[2] == ["17.26", "200.05"]
    assert grid.notes == ()


@pytest.mark.parametrize(
    ("encoding", "note"),
    [
        ("utf-16", "the text was read as UTF-16"),
        ("utf-16-le", "the text was read as UTF-16-LE"),
        ("utf-16-be", "the text was read as UTF-16-BE"),
        ("utf-32", "the text was read as UTF-32"),
        ("cp1252", "the text is not UTF-8; it was read as Windows-1252"),
    ],
)
def test_encodings_are_found_and_reported(tmp_path: Path, encoding: str, note: str) -> None:
    grid = grid_of(tmp_path / "a.csv", "Temperature (°C),Density (dBµV/m)\n25,30\n".encode(encoding))
    assert grid.rows[0] == ["Temperature (°C)", "Density (dBµV/m)"]
    assert grid.notes == (note,)


def test_nul_bytes_are_left_out_and_counted(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", b"Ref\0,0.00dBm\0\r\n\0\r\nf\0,P\0\r\n1\0,2\0\r\n3\0,4\0\r\n")
    assert grid.notes == ("9 NUL characters were left out",)
    assert grid.rows == [["Ref", "0.00dBm"], [], ["f", "P"], ["1", "2"], ["3", "4"]]


def test_row_numbers_are_line_numbers(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", 'title\n\n"two\nlines",x\n  \n1,2\n')
    assert grid.value(1, 1) == "title"
    assert grid.rows[1] == []
    assert grid.value(3, 1) == "two\nlines"
    assert grid.rows[3:5] == [[], []]
    assert grid.value(6, 2) == "2"
    assert grid.where(6, 2) == "a.csv, B6"


def test_quotes_protect_delimiters(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", '"Power, peak (dBm)", "say ""max"""\n1.5, 2\n')
    assert grid.rows[0] == ["Power, peak (dBm)", 'say "max"']


def test_unpaired_quotes_are_plain_characters(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", 'dish,gain\n12" dish,30.5\n"open,31\n3,32\n')
    assert grid.rows[1:] == [['12" dish', "30.5"], ['"open', "31"], ["3", "32"]]
    assert grid.notes == ("the quotes are not in pairs; they were read as plain characters",)


def test_comment_lines_are_marked_and_their_fields_parted(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", "# digitiser 3\n#\n# Frequency [Hz],Gain [dB]\n! note\n0,1.5\n1,2.5\n")
    assert grid.comment_rows == {1, 2, 3, 4}
    assert grid.rows[:4] == [["digitiser 3"], [], ["Frequency [Hz]", "Gain [dB]"], ["note"]]


def test_percent_begins_a_comment_only_where_the_file_begins_so(tmp_path: Path) -> None:
    assert grid_of(tmp_path / "a.csv", "EVM,P\n% rms,dBm\n3.1,20\n").rows[1] == ["% rms", "dBm"]
    assert grid_of(tmp_path / "b.csv", "% EVM,P\n3.1,20\n4.1,20\n").comment_rows == {1}
    assert grid_of(tmp_path / "c.csv", "%,dB\n3.1,20\n").comment_rows == frozenset()


def test_mark_that_begins_every_row_is_no_comment(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", "run,P\n#1,45.2\n#2,45.3\n#3,45.1\n")
    assert grid.comment_rows == frozenset()
    assert grid.rows[1] == ["#1", "45.2"]


def test_separator_line_is_obeyed(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", "sep=;\nf;G\n1,5;2,5\n")
    assert grid.rows[1:] == [["f", "G"], ["1,5", "2,5"]]
    assert grid.comment_rows == {1}


def test_empty_fields_keep_their_columns(tmp_path: Path) -> None:
    assert grid_of(tmp_path / "a.csv", "a,b,c\n1,,3\n,,\n4,5,6\n").rows[1:3] == [["1", "", "3"], ["", "", ""]]
    assert grid_of(tmp_path / "a.tsv", "a\tb\tc\n1\t\t3\n4\t5\t6\n").rows[1] == ["1", "", "3"]


def test_single_column_is_read(tmp_path: Path) -> None:
    assert grid_of(tmp_path / "a.csv", "Gain (dB)\n1.5\n2.5\n").column_floats(1, 2, 4)[0].tolist() == [
        1.5,
        2.5,
    ]


def test_text_columns_are_not_parted_at_their_blanks(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.tsv", "mode\tP\nlow band, wide\t1.5\nhigh band, wide\t2.5\n")
    assert grid.rows[1] == ["low band, wide", "1.5"]


@pytest.mark.parametrize(
    ("content", "what"),
    [
        (b"\n \n\t\r\n", "nothing but blanks"),
        (b"PK\x03\x04abc", "zip directory cannot be read"),
        (b"\x01\x02\x03\x04\x05binary\x06\x07", "no text file"),
        (b"\xff\xfea\x00\x00\xd8", "should be utf-16"),
    ],
)
def test_what_is_no_table_is_refused(tmp_path: Path, content: bytes, what: str) -> None:
    (tmp_path / "a.csv").write_bytes(content)
    assert what in refused(lambda: open_grids(tmp_path / "a.csv"))


numbers = st.floats(allow_nan=False, allow_infinity=False, width=32).map(repr)


@given(
    st.lists(st.lists(numbers, min_size=3, max_size=3), min_size=3, max_size=20),
    st.sampled_from([(",", "."), (";", "."), (";", ","), ("\t", ","), ("\t", "."), ("  ", "."), (" ", ",")]),
)
def test_number_tables_are_parted_whatever_the_marks(table: list[list[str]], marks: tuple[str, str]) -> None:
    delimiter, decimal = marks
    lines = [delimiter.join(field.replace(".", decimal) for field in row) for row in table]
    layout = find_layout(["f" + delimiter + "G" + delimiter + "NF", *lines])
    assert layout.delimiter == delimiter[0]
    assert layout.width == 3


@pytest.mark.parametrize("line", ["1,5", "Ambient: 23,5 °C", "Gain 1,5"])
def test_a_decimal_comma_in_a_line_of_one_field_is_no_separator(tmp_path: Path, line: str) -> None:
    path = tmp_path / "a.csv"
    path.write_text(f"{line}\nf;G\n20,5;1,5\n{line}\n27,5;1,7\n", encoding="utf-8")
    grid = next(iter(open_grids(path)))
    assert list(grid.row(1)) == list(grid.row(4)) == [line]


def test_quoted_decimal_commas_between_commas_are_found(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    path.write_text('f,G\n"27,5","20,1"\n"30,0","19,9"\n', encoding="utf-8")
    grid = next(iter(open_grids(path)))
    assert grid.decimal == "," and list(grid.row(2)) == ["27,5", "20,1"]


def test_commas_below_headers_with_semicolons_may_be_decimals(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    path.write_text("Gain (dB);f (GHz)\n20;27.5\n1,5\n1,5\n", encoding="utf-8")
    assert "the comma seems to part both the fields and the decimals" in refused(lambda: open_grids(path))


@pytest.mark.parametrize("damaged", [b"12.\0", b"\0.5", b"1\0", b"1\0.5"])
def test_a_nul_that_may_have_replaced_a_digit_leaves_no_number(tmp_path: Path, damaged: bytes) -> None:
    grid = grid_of(tmp_path / "a.csv", b"Serial,SN1\0\nf,G\n1,2\n3," + damaged + b"\n5,6\n7,8\n")
    assert grid.value(1, 2) == "SN1"
    numbers, odd = grid.column_floats(2, 3, 7)
    assert odd == [4] and numpy.isnan(numbers[1])


@pytest.mark.parametrize(
    ("text", "decimal", "grouped"),
    [
        ("f;G\n27,5;1.234\n28,5;2\n", ",", False),
        ("f;G\n27,5;1.234,5\n28,5;1.234\n", ",", True),
        ("f;G\n27.5;1,234\n28.5;2\n", ".", False),
        ("f;G\n27.5;1,234,567\n28.5;1,234\n", ".", True),
        ("Version;1.2\nf;G\n27,5;3\n28,5;2\n", ",", False),
        ("f;G\n1.234;1,234\n2.345;2\n", ".", False),
        ("f;G\n1;1,234\n2;2,345\n", "", False),
    ],
)
def test_marks_count_where_they_can_only_be_one_thing(
    tmp_path: Path, text: str, decimal: str, grouped: bool
) -> None:
    grid = grid_of(tmp_path / "a.csv", text)
    assert (grid.decimal, grid.grouped) == (decimal, grouped)


def test_a_nul_behind_a_decimal_comma_leaves_no_number(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.csv", b"f;G\n27,5;20,5\n28,5;20,\0\n28,5;20,5\n29,5;5,5\n")
    assert grid.column_floats(2, 2, 6)[1] == [3]


@pytest.mark.parametrize(
    ("head", "names"),
    [
        ("Theta [deg.]  Phi   [deg.]  Abs(Dir.)[dBi   ]", ["Theta [deg.]", "Phi [deg.]", "Abs(Dir.)[dBi ]"]),
        ("f / GHz       Realized Gain / dBi     Loss/dB", ["f / GHz", "Realized Gain / dBi", "Loss/dB"]),
    ],
)
def test_a_line_drawn_under_the_headers_is_none_of_the_rows(
    tmp_path: Path, head: str, names: list[str]
) -> None:
    grid = grid_of(tmp_path / "a.txt", f"{head}\n{'-' * 60}\n" + "  0.000   15.000   1.0e+01\n" * 3)
    assert grid.rows[:2] == [names, []]
    assert grid_of(tmp_path / "b.csv", "a,b\n---,----\n1,---\n").rows == [["a", "b"], [], ["1", "---"]]


def test_blanks_within_fields_do_not_part_them(tmp_path: Path) -> None:
    assert grid_of(tmp_path / "a.txt", "Spots\nOffset\tL(f)\n1 kHz\t-85.1 dBc/Hz\n1 MHz\t-125 dBc/Hz\n").rows[1:] == [
        ["Offset", "L(f)"], ["1 kHz", "-85.1 dBc/Hz"], ["1 MHz", "-125 dBc/Hz"],
    ]  # fmt: skip


def test_a_bound_among_runs_of_blanks_is_one_field(tmp_path: Path) -> None:
    body = "17.7  < -60  2.1\n18.7  <= -61  2.2\n19.7  -55  2.5\n"
    assert grid_of(tmp_path / "a.dat", f"f (GHz)  ACLR (dBc)  EVM (%)\n{body}").rows == [
        ["f (GHz)", "ACLR (dBc)", "EVM (%)"],
        ["17.7", "< -60", "2.1"],
        ["18.7", "<= -61", "2.2"],
        ["19.7", "-55", "2.5"],
    ]
    assert grid_of(tmp_path / "b.csv", "Gain (dB);f (GHz)\n20;27.5\n> 60\n> 61\n").rows[2:] == [
        ["> 60"],
        ["> 61"],
    ]


def test_a_last_line_that_may_have_been_cut_off_is_told(tmp_path: Path) -> None:
    whole = "f (GHz),gain (dB)\n17.7,20.5\n18.9,20.6\n20.2,20.7"
    assert grid_of(tmp_path / "whole.csv", whole).notes == ()
    assert grid_of(tmp_path / "short.csv", whole[:-2] + "\n").notes == ()
    (note,) = grid_of(tmp_path / "cut.csv", whole[:-2]).notes
    assert "line 4" in note and "'20'" in note and "cut.csv, B4" in note


def test_more_columns_than_a_sheet_has_are_refused(tmp_path: Path) -> None:
    wide = ",".join(f"c{number}" for number in range(16_385))
    message = refused(lambda: grid_of(tmp_path / "wide.csv", f"{wide}\n{wide}\n"))
    assert "16,385 fields" in message
