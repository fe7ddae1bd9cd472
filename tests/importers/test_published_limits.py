"""The published table: every row ends in a limit, joined to one, or not taken with the reason."""

from __future__ import annotations

import csv
import re
from collections import Counter
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from specflow.errors import FileError
from specflow.importers.published_limits import PublishedLimit, PublishedTable, read_published_limits
from specflow.importers.published_row import PublishedRow
from specflow.limits import LimitContext, alternatives, evaluate_limit, limit_text, parse_limit
from specflow.limits.expression_shape import walk
from specflow.limits.tree import expressions_in
from specflow.model.columns import Columns, TextColumn
from specflow.model.expression import Number
from specflow.model.limit import LimitState
from specflow.units import parse_quantity

TABLE = Path(__file__).parents[1] / "data" / "standards_limits.csv"
HEADER = "id,standard,version,clause,parameter,bound,value,unit,conditions\n"


@cache
def table() -> PublishedTable:
    return read_published_limits(TABLE)


@cache
def source() -> tuple[dict[str, str], ...]:
    with TABLE.open(encoding="utf-8", newline="") as file:
        return tuple(csv.DictReader(file))


def limit(id: str) -> PublishedLimit:
    return next(found for found in table().limits if found.id == id)


def test_all_513_rows_are_accounted_for() -> None:
    assert table().row_count == 513
    reasons = Counter(re.sub(r"[,:(].*", "", left.why).strip() for left in table().not_taken)
    assert reasons == {"no bound is stated": 58, "the row says that it is not itself a requirement": 3}
    assert len(table().limits) == 399
    assert table().joined_count == 53
    assert len(table().limits) + table().joined_count + len(table().not_taken) == 513
    rows = [row for found in table().limits for row in found.rows] + [left.row for left in table().not_taken]
    assert sorted(rows) == list(range(2, 515))


def test_rows_not_taken_are_those_without_a_bound_or_said_to_be_no_requirement() -> None:
    expected = {
        line["id"] for line in source() if not line["bound"] or "is_requirement=no" in line["conditions"]
    }
    assert {left.id for left in table().not_taken} == expected
    assert all(left.why for left in table().not_taken)


def test_limits_of_several_rows_are_the_masks_and_the_alternatives() -> None:
    several = {found.id: len(found.rows) for found in table().limits if len(found.rows) > 1}
    assert several == {
        "BS2O-ACLR": 6,
        "BS1C-ACLR": 5,
        "BS2O-OBUE-A-24.25-33.4": 3,
        "BS2O-OBUE-A-37-52.6": 3,
        "BS2O-OBUE-A-52.6-71": 3,
        "BS1C-OBUE-WA-Agt1G": 2,
        "BS1C-OBUE-WA-Alt1G": 2,
        "BS1C-OBUE-WA-Bgt1G": 2,
        "BS1C-OBUE-WA-Blt1G": 2,
        "BS1C-OBUE-LA": 2,
        "BS1C-OBUE-MRle31": 2,
        "BS1C-OBUE-MR31-38": 2,
        "BS1C-OBUE-B2": 4,
        "UE2-SEM-50": 2,
        "UE2-SEM-100": 2,
        "UE2-SEM-200": 2,
        "UE2-SEM-400": 2,
        "WIFI-MASK20": 5,
        "WIFI-HTMASK20": 4,
        "WIFI-11P-A": 5,
        "WIFI-11P-B": 5,
        "WIFI-11P-C": 5,
        "WIFI-11P-D": 5,
        "WIFI-MASKM": 2,
    }


def test_every_number_of_a_bound_is_in_the_limit_with_its_digits() -> None:
    for found in table().limits:
        held = Counter(
            part.text
            for value in expressions_in(found.limit.tree)
            for part in walk(value)
            if isinstance(part, Number)
        )
        for row in found.rows:
            value = source()[row - 2]["value"]
            numbers = re.findall(r"(?<![\w.])\d+(?:\.\d+)?", value)
            assert not Counter(numbers) - held, (found.id, value, found.limit.text)


def test_every_condition_is_parsed_or_in_the_limit_or_kept_verbatim() -> None:
    for found in table().limits:
        for row in found.rows:
            line = source()[row - 2]
            for written in filter(None, (part.strip() for part in line["conditions"].split(";"))):
                places = (
                    written in {condition.verbatim for condition in found.conditions.values()},
                    written in found.in_limit,
                    written in found.unparsed or f"{line['id']}: {written}" in found.unparsed,
                )
                assert any(places), (found.id, written)
    assert table().unparsed_count == 552


def test_provenance_of_every_limit_is_that_of_its_first_row() -> None:
    for found in table().limits:
        line = source()[found.rows[0] - 2]
        assert (found.document, found.version, found.clause, found.parameter_title) == (
            line["standard"],
            line["version"],
            line["clause"],
            line["parameter"],
        )


def test_every_limit_reads_back_and_has_the_unit_and_strictness_of_its_row() -> None:
    for found in table().limits:
        assert parse_limit(limit_text(found.limit)).tree == found.limit.tree
        if len(found.rows) == 1:
            line = source()[found.rows[0] - 2]
            assert found.limit.unit == line["unit"].replace("us", "µs"), found.id
            if line["value"] == "TBD":
                assert found.limit.state is LimitState.TBD
            elif re.fullmatch(r"-?\d+(\.\d+)?", line["value"]):
                _check_single(found, line)


def _check_single(found: PublishedLimit, line: dict[str, str]) -> None:
    gate = {"adjacent_channel_power": parse_quantity("0 dBm")}
    bounds = evaluate_limit(found.limit, LimitContext(Columns(1), gate))
    value, strict = float(line["value"]), "strict=yes" in line["conditions"]
    upper = None if bounds.upper is None else float(bounds.upper[0])
    lower = None if bounds.lower is None else float(bounds.lower[0])
    expected = {"max": (None, value), "min": (value, None), "abs": (-value, value)}[line["bound"]]
    assert (lower, upper) == expected, found.id
    assert bool((bounds.lower_strict | bounds.upper_strict).any()) is strict


def test_conditions_are_numbers_ranges_and_words() -> None:
    refsens = limit("UE2-REFSENS-PC3-n257-100").conditions
    assert refsens["bw"].numbers == ("100",) and refsens["bw"].unit == "MHz"
    assert refsens["band"].words == ("n257",)
    assert limit("BS2O-TAE-MIMO").conditions["scs"].numbers == ("60", "120")
    spurious = limit("BS2O-SPUR-B-1").conditions["f"]
    assert (spurious.low, spurious.high, spurious.unit) == ("0.03", "1", "GHz")
    leakage = limit("UE2-LEAK-HI").conditions["EIRP"]
    assert (leakage.low, leakage.low_open, leakage.high, leakage.unit) == ("0", True, None, "dBm")
    half_open = limit("MU-36521-MOP-1").conditions["f"]
    assert (half_open.low, half_open.low_open, half_open.high, half_open.high_open) == (
        "3",
        True,
        "4.2",
        False,
    )


def test_statistics_gates_and_bandwidths_go_into_the_limit() -> None:
    assert limit("UE2-SPH-PC3-n257").limit.text == ">= 11.5 dBm at 50 % of CDF over full_sphere"
    assert limit("UE2-EISSPH-PC1-n257-50").limit.text == "<= -89.5 dBm at 85 % of CCDF over full_sphere"
    assert limit("UE2-SPH-PC6-n257").limit.text == ">= 20 dBm worst over two_angular_areas"
    assert limit("UE2-ACLR-n257").limit.text == "> 17 dB if adjacent_channel_power > -35 dBm"
    assert limit("BS2O-SPUR-B-3").limit.text == "<= -20 dBm in 10 MHz"
    assert limit("WIFI-FLAT-OUT").limit.text == "-6 dB..4 dB"
    assert limit("BS2O-OBW").limit.text == "< BW_Channel MHz"
    assert limit("BS1C-EVM-QPSK").limit.text == "<= 17.5 %"


def _at(offsets: list[float], **words: str) -> LimitContext:
    size = len(offsets)
    text = {name: TextColumn.of([word] * size) for name, word in words.items()}
    declared = {
        "P_rated_t_TRP": parse_quantity("35 dBm"),
        "BW_contiguous": parse_quantity("400 MHz"),
        "BW": parse_quantity("400 MHz"),
        "f_max": parse_quantity("1500 MHz"),
    }
    columns = {name: np.array(offsets) for name in ("offset", "offset_from_edge")}
    return LimitContext(Columns(size, columns, text, dict.fromkeys(columns, "MHz")), declared)


def test_base_station_mask_differs_by_category_beyond_f_b() -> None:
    # 38.104 9.7.4.3.2 and 9.7.4.3.3 at P = 35 dBm, BW = 400 MHz, so f_B = 800 MHz; numbers by hand from the md table
    mask = limit("BS2O-OBUE-A-24.25-33.4").limit
    category_a = evaluate_limit(mask, _at([10, 100, 1000, 1600], category="A"))
    assert category_a.upper is not None and category_a.bandwidth_hz is not None
    assert category_a.upper[:3].tolist() == [-5.0, -13.0, -13.0]
    assert category_a.applies.tolist() == [True, True, True, False]
    category_b = evaluate_limit(mask, _at([10, 100, 1000, 1600], category="B"))
    assert category_b.upper is not None and category_b.bandwidth_hz is not None
    assert category_b.upper[:3].tolist() == [-5.0, -13.0, -5.0]
    assert category_b.bandwidth_hz[:3].tolist() == [1e6, 1e6, 1e7]


def test_user_equipment_mask_has_the_more_stringent_value_at_its_breakpoint() -> None:
    # 38.101-2 T6.5.2.1-1: 50 MHz: -5 to 5 MHz, -13 to 100 MHz
    found = evaluate_limit(limit("UE2-SEM-50").limit, _at([0, 4, 5, 100, 101]))
    assert found.upper is not None
    assert found.upper[:4].tolist() == [-5.0, -5.0, -13.0, -13.0]
    assert found.outside.tolist() == [False, False, False, False, True]


def test_wireless_lan_mask_runs_between_its_breakpoints_to_the_looser_floor() -> None:
    # IEEE 802.11 17.3.9.3
    mask = limit("WIFI-MASK20").limit
    found = evaluate_limit(mask, _at([9, 10, 20, 30]))
    assert found.upper is not None
    assert found.upper.tolist() == [0.0, -10.0, -28.0, -40.0]
    # beyond 30 MHz -40 dBr or -39 dBm/MHz: two units, so evidence of either kind is needed
    assert evaluate_limit(mask, _at([40])).unknown.all()


def test_adjacent_channel_leakage_is_the_looser_of_relative_and_absolute() -> None:
    # 38.104 9.7.3.3, T-1 and T-2
    relative, absolute = alternatives(limit("BS2O-ACLR").limit)
    where = LimitContext(
        Columns(
            1, {"band_range": np.array([28.0])}, {"bs_class": TextColumn.of(["MR"])}, {"band_range": "GHz"}
        )
    )
    assert evaluate_limit(relative.limit, where).lower == pytest.approx([28.0])
    assert evaluate_limit(absolute.limit, where).upper == pytest.approx([-20.0])
    assert (relative.limit.unit, absolute.limit.unit) == ("dB", "dBm/MHz")


def _written(tmp_path: Path, text: str) -> PublishedTable:
    path = tmp_path / "table.csv"
    path.write_text(text, encoding="utf-8")
    return read_published_limits(path)


def test_columns_are_found_by_name_in_any_order(tmp_path: Path) -> None:
    found = _written(tmp_path, "Unit,Value,BOUND,parameter,id\ndB,3.20,max,noise figure,R1\n")
    assert [(part.id, part.limit.text) for part in found.limits] == [("R1", "<= 3.20 dB")]


@pytest.mark.parametrize(
    ("row", "why"),
    [
        ("R1,s,v,c,p,max,3,quarkz,", "cannot be read"),
        ("R1,s,v,c,p,most,3,dB,", "'most' is not one of"),
        ("R1,s,v,c,p,max,,dB,", "no value"),
        (",s,v,c,p,max,3,dB,", "no id"),
        ("R1,s,v,c,p,max,3; drop,dB,", "cannot be read"),
    ],
)
def test_faulty_row_is_not_taken_and_the_others_are(tmp_path: Path, row: str, why: str) -> None:
    found = _written(tmp_path, f"{HEADER}{row}\nR2,s,v,c,p,max,3,dB,a=1;note=why not\n")
    assert [part.id for part in found.limits] == ["R2"]
    assert [left.row for left in found.not_taken] == [2] and why in found.not_taken[0].why
    assert found.limits[0].unparsed == ("note=why not",)


def test_second_row_of_an_id_is_not_taken(tmp_path: Path) -> None:
    found = _written(tmp_path, f"{HEADER}R1,s,v,c,p,max,3,dB,\nr1,s,v,c,p,max,4,dB,\n")
    assert [left.why for left in found.not_taken] == ["the id is that of row 2"]


def test_or_with_that_names_nobody_is_kept(tmp_path: Path) -> None:
    found = _written(tmp_path, f"{HEADER}R1,s,v,c,p,max,3,dB,or_with=nobody;rule=whichever less stringent\n")
    assert found.limits[0].unparsed == ("or_with=nobody",)


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "empty"),
        (b"id,value\n1,2\n", "no column parameter, bound, unit"),
        (b"id,\xff\n", "not UTF-8"),
        (b'id,"a', "no csv"),
    ],
)
def test_file_that_is_no_such_table_is_refused(tmp_path: Path, content: bytes, message: str) -> None:
    path = tmp_path / "table.csv"
    path.write_bytes(content)
    with pytest.raises(FileError, match=message):
        read_published_limits(path)


def test_missing_file_is_refused(tmp_path: Path) -> None:
    with pytest.raises(FileError, match="cannot be read"):
        read_published_limits(tmp_path / "nowhere.csv")


def test_row_without_a_clause_has_nothing_joined() -> None:
    row = PublishedRow(2, "R", "", "", "", "p", "max", "3", "dB", "")
    assert row.limit_text() == "<= 3 dB"
