"""Touchstone files: published ones with facts that others computed, the examples of the format, and what is refused."""

from __future__ import annotations

import json
import random
from collections import Counter
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.errors import FileError
from specflow.importers.readers.source import read_source
from specflow.importers.readers.touchstone import is_touchstone, read_network
from specflow.importers.readers.touchstone_network import DoubtKind, NetworkFile, values_per_frequency
from tests.importers.readers.touchstone_writer import read_text

DATA = Path(__file__).parents[2] / "data"
CASES = {
    case["id"]: case
    for case in json.loads((DATA / "rf_cases.json").read_text())
    if case["id"].startswith("touch")
}


def published(name: str) -> NetworkFile:
    return read_network(read_source(DATA / name))


def db(network: NetworkFile, name: str, hertz: float) -> float:
    """|S| in dB of an entry at a frequency of the file, as the facts of tests/data/README.md give it."""
    [place] = np.flatnonzero(network.frequency_hz == hertz)
    i, j = network.entry(name)
    return round(float(20 * np.log10(abs(network.s[place, i, j]))), 4)


# --- files that others published: facts computed with numpy and scikit-rf, not with this reader


def test_a_transistor_with_a_noise_block() -> None:
    network = published("transistor_noise.s2p")
    assert (len(network.axis), network.axis[0], network.axis[-1], network.axis_unit) == (37, 400, 2000, "MHz")
    place = list(network.axis).index(1000)
    assert network.first[place, 1, 0] == 7.5769 and network.second[place, 1, 0] == 89.52
    assert db(network, "S21", 1e9) == 17.5898
    noise = network.noise
    assert noise is not None and (len(noise.axis), noise.axis[0], noise.axis[-1]) == (37, 400, 2000)
    at = list(noise.axis).index(1000)
    assert (noise.fmin_db[at], noise.magnitude[at], noise.angle_deg[at], noise.rn[at]) == (
        0.9502,
        0.09867,
        162.93,
        0.0914,
    )
    assert noise.rn_ohm[at] == pytest.approx(4.57)
    assert (noise.fmin_db.min(), noise.axis[noise.fmin_db.argmin()]) == (0.8377, 440)
    assert {"VAR I_out= 9.990000", "VAR V_out= 5.000000"} <= {one.text for one in network.comments}


def test_a_four_port_of_75_ohm() -> None:
    network = published("four_port_75ohm.s4p")
    assert (network.ports, len(network.axis), set(network.reference_ohm)) == (4, 205, {75.0})
    assert (network.frequency_hz[0], network.frequency_hz[-1]) == (5e8, 4.5e9)
    assert (db(network, "S21", 990e6), db(network, "S11", 990e6)) == (-1.6678, -14.2602)
    assert (db(network, "S13", 5e8), db(network, "S31", 5e8)) == (-86.8743, -92.7804)
    greatest = int(np.argmax(network.first[:, 1, 0]))
    assert (round(network.first[greatest, 1, 0], 4), network.frequency_hz[greatest]) == (-1.2215, 1.11e9)
    assert not network.doubts  # the comments list S11 S12 ... row by row, as the format has it
    assert network.place(0, 2, 0) == (11, 1) and network.lines_below(2, 0) == 2


def test_a_splitter_with_an_upper_case_ending() -> None:
    network = published("splitter_25c.S3P")
    assert (network.ports, len(network.axis)) == (3, 169)
    assert (network.frequency_hz[0], network.frequency_hz[-1]) == (1e7, 2e10)
    facts = {"S21": -3.6894, "S31": -3.7081, "S23": -21.9954}
    assert {name: db(network, name, 6e9) for name in facts} == facts
    inside = network.frequency_hz <= 12e9
    imbalance = np.abs(network.first[:, 1, 0] - network.first[:, 2, 0])[inside]
    assert round(imbalance.max(), 4) == 0.2035 and network.frequency_hz[imbalance.argmax()] == 1.1e10
    assert network.port_names == ("SUMPORT", "OUT1 PORT", "OUT2 PORT")


def test_a_ten_port_with_impedances_in_comments() -> None:
    network = published("ten_port_sim.s10p")
    assert (network.ports, len(network.axis), network.frequency_hz[0]) == (10, 11, 3.6e9)
    facts = {"S1_1": -4.3462, "S10_10": -2.2327, "S1_10": -11.3063}
    assert {name: db(network, name, 3.7e9) for name in facts} == facts
    assert network.impedances is not None
    assert np.round(network.impedances[0, :2], 6).tolist() == [268.957769, 134.456]
    [doubt] = network.doubts
    assert (doubt.kind.value, doubt.line) == ("reference", 55)
    assert "268.957769 ohm" in doubt.what and "no R (so 50 ohm)" in doubt.what


@pytest.mark.parametrize(
    ("name", "facts", "least"),
    [
        ("lowpass_25c.s2p", {1e9: -0.0404, 2e9: -0.0523, 4e9: -0.0515, 1e10: -0.1413}, (-49.1401, 3.1575e10, -24.5678)),
        ("lowpass_125c.s2p", {1e9: -0.0810, 2e9: -0.1152, 4e9: -0.1639, 1e10: -0.3539}, (-50.9742, 3.135e10, -24.8840)),
    ],
)  # fmt: skip
def test_a_filter_at_two_temperatures(
    name: str, facts: dict[float, float], least: tuple[float, float, float]
) -> None:
    network = published(name)
    assert (len(network.axis), network.frequency_hz[0], network.frequency_hz[-1]) == (2006, 1e7, 5e10)
    assert {hertz: db(network, "S21", hertz) for hertz in facts} == facts
    low = int(np.argmin(network.first[:, 1, 0]))
    assert (round(network.first[low, 1, 0], 4), network.frequency_hz[low], db(network, "S11", 1e9)) == least


def test_an_amplifier_at_millimetre_waves() -> None:
    network = published("mmwave_tx_140_220ghz.S2P")
    assert (len(network.axis), network.frequency_hz[0], network.frequency_hz[-1]) == (801, 1.4e11, 2.2e11)
    assert (db(network, "S21", 1.9e11), db(network, "S11", 1.9e11)) == (0.8954, -12.3301)
    gain = 20 * np.log10(network.first[:, 1, 0])
    assert (round(gain.max(), 4), network.frequency_hz[gain.argmax()]) == (2.4924, 1.808e11)
    within = network.frequency_hz[gain >= gain.max() - 3]
    assert (len(within), within[0], within[-1]) == (297, 1.636e11, 1.932e11)


# --- the cases of the format


def test_the_cases_of_the_specification(tmp_path: Path) -> None:
    one = CASES["touchstone-v1-2port-order"]
    network = read_text(tmp_path, f"{one['inputs']['option_line']}\n{one['inputs']['data']}\n", "one.s2p")
    found = {
        "frequency_hz": network.frequency_hz[0],
        "s11_mag": network.first[0, 0, 0],
        "s21_mag": network.first[0, 1, 0],
        "s21_deg": network.second[0, 1, 0],
        "s12_mag": network.first[0, 0, 1],
        "s12_deg": network.second[0, 0, 1],
        "s22_mag": network.first[0, 1, 1],
    }
    assert found == one["expected"]

    two = CASES["touchstone-v2-12-21-order"]
    said = two["inputs"]
    network = read_text(
        tmp_path,
        f"[Version] {said['version']}\n{said['option_line']}\n[Number of Ports] 2\n[Two-Port Data Order] "
        f"{said['two_port_data_order']}\n[Number of Frequencies] 1\n[Reference] {said['reference'][0]}\n"
        f"{said['reference'][1]}\n[Network Data]\n{said['data']}\n[End]\n",
        "two.s2p",
    )
    assert {"s12_mag": network.first[0, 0, 1], "s21_mag": network.first[0, 1, 0]} == two["expected"]
    assert list(network.reference_ohm) == said["reference"]

    counts = CASES["touchstone-values-per-frequency"]
    ports = counts["inputs"]["ports"]
    assert [values_per_frequency(n) for n in ports] == counts["expected"]["full"]
    for triangle in ("Lower", "Upper"):
        assert [values_per_frequency(n, triangle) for n in ports] == counts["expected"]["lower_or_upper"]


def test_examples_10_and_11_normalised_impedances(tmp_path: Path) -> None:
    """0.99 at R 75 in version 1 is 74.25 ohm in version 2 (Touchstone 2.1, Examples 10 and 11)."""
    first = read_text(tmp_path, "# MHz Z RI R 75\n100 0.99 0\n", "a.s1p")
    second = read_text(
        tmp_path,
        "[Version] 2.0\n# MHz Z RI R 75\n[Number of Ports] 1\n[Number of Frequencies] 1\n[Network Data]\n"
        "100 74.25 0\n[End]\n",
        "b.s1p",
    )
    expected = (74.25 - 75) / (74.25 + 75)
    assert first.s[0, 0, 0] == pytest.approx(expected) and second.s[0, 0, 0] == pytest.approx(expected)
    assert (
        first.conversion == "S from Z at 75 ohm (normalised to it in version 1)" and second.version == "2.0"
    )


def test_the_first_option_line_holds(tmp_path: Path) -> None:
    """Example 17 of the specification has a second one, to be ignored."""
    network = read_text(tmp_path, "# MHz S RI R 50\n# GHz S DB R 75\n100 0.5 0\n", "a.s1p")
    assert (network.axis_unit, network.pair_format, network.reference_ohm[0]) == ("MHz", "RI", 50)
    [said] = network.remarks
    assert "another option line" in said.what and (said.line, said.warns) == (2, True)


def test_options_in_any_order_and_case_with_their_defaults(tmp_path: Path) -> None:
    network = read_text(tmp_path, "#  ri  mhz r 75 S  \t\n1 1 0\n", "a.S1P")
    assert (network.axis_unit, network.pair_format, network.reference_ohm[0]) == ("MHz", "RI", 75)
    plain = read_text(tmp_path, "#\n1 1 0\n", "a.s1p")
    assert (plain.axis_unit, plain.pair_format, plain.reference_ohm[0]) == ("GHz", "MA", 50)
    assert [one.what for one in plain.remarks] == ["the option line names no R: 50 ohm by the format"]


def test_a_reference_for_each_port(tmp_path: Path) -> None:
    network = read_text(tmp_path, "# GHz S RI R 50 75\n1 1 0 2 0 3 0 4 0\n", "a.s2p")
    assert (network.version, list(network.reference_ohm)) == ("1.1", [50, 75])


def test_noise_in_ohm_in_version_2_whatever_the_option_line(tmp_path: Path) -> None:
    text = (
        "[Version] 2.0\n# GHz S RI R 50\n[Number of Ports] 2\n[Two-Port Data Order] 21_12\n"
        "[Number of Frequencies] 2\n[Number of Noise Frequencies] 1\n[Reference] 50 25.0\n[Network Data]\n"
        "2 .95 0 3.57 0 .04 0 .66 0\n22 .6 0 1.3 0 .14 0 .56 0\n[Noise Data]\n4 .7 .64 69 19\n[End]\n"
    )
    network = read_text(tmp_path, text, "a.ts")
    assert network.noise is not None and network.noise.rn_ohm[0] == 19.0
    assert network.noise.gamma_opt[0] == pytest.approx(0.64 * np.exp(1j * np.deg2rad(69)))


def test_mixed_modes_name_the_entries(tmp_path: Path) -> None:
    """Differential 2·R, common R/2 (Touchstone 2.1, [Mixed-Mode Order])."""
    rows = "\n".join(" ".join(f"{10 * i + j} 0" for j in range(1, 5)) for i in range(1, 5))
    text = (
        "[Version] 2.1\n# MHz S MA\n[Number of Ports] 4\n[Number of Frequencies] 1\n[Reference] 50 75 75 50\n"
        f"[Mixed-Mode Order] D2,3 C2,3 S4 S1\n[Network Data]\n5 {rows}\n[End]\n"
    )
    network = read_text(tmp_path, text, "a.s4p")
    assert network.port_modes == ("D2,3", "C2,3", "S4", "S1")
    assert list(network.reference_ohm) == [150, 37.5, 50, 50]
    assert network.entry_name(0, 1) == "S D2,3 C2,3" and network.first[0, 0, 1] == 12


# --- how files are dirty and still mean one thing


@pytest.mark.parametrize(
    "content",
    [
        b"\xef\xbb\xbf# MHz S RI R 50\t\t\r\n\r\n100 0.5 0.25\t! beside data\r\n",
        "! déc. 05, 2019 ±1 Ω\n# MHz S RI R 50\n   1.0E+02\t+.5 2.5e-1\n".encode(),
        "! d\xe9c. 05\n# MHz S RI R 50\n0000100.000 0.5 0.25".encode("cp1252"),
        "# MHz S RI R 50\n100 0.5 0.25\n".encode("utf-16"),
        b"# MHz S RI R 50\r100 0.5 0.25\r",
    ],
)
def test_line_ends_marks_tabs_and_other_characters_change_nothing(tmp_path: Path, content: bytes) -> None:
    network = read_text(tmp_path, content, "a.s1p")
    assert (network.axis[0], network.s[0, 0, 0]) == (100, 0.5 + 0.25j)


def test_a_matrix_on_one_line_is_accepted_and_said(tmp_path: Path) -> None:
    """Some simulators write all entries of a frequency on one line, with blanks in the option line."""
    numbers = " ".join(f"{k}.0 0.0" for k in range(1, 10))
    network = read_text(tmp_path, f"#   Hz   S  RI   R   50\n!\n0.0 {numbers}\n1e8 {numbers}\n", "a.s3p")
    assert network.s[1].real.tolist() == [[1, 2, 3], [4, 5, 6], [7, 8, 9]]
    assert "on one line" in network.remarks[0].what and network.place(1, 1, 0) == (4, 8)


def test_rows_that_run_on_are_counted_off_where_every_frequency_does_the_same(tmp_path: Path) -> None:
    def frequency(value: int) -> str:
        pairs = [f"{k} 0" for k in range(1, 10)]
        return "\n".join([f"{value} {' '.join(pairs[:4])}", " ".join(pairs[4:8]), pairs[8]])

    network = read_text(tmp_path, f"# GHz S RI R 50\n{frequency(1)}\n{frequency(2)}\n", "a.s3p")
    assert network.s[0].real.tolist() == [[1, 2, 3], [4, 5, 6], [7, 8, 9]]
    assert any("rows of the matrix do not begin on lines of their own" in one.what for one in network.remarks)


def test_a_file_without_a_telling_name_goes_by_its_rows(tmp_path: Path) -> None:
    network = read_text(tmp_path, "# GHz S RI R 50\n1 1 0 2 0 3 0 4 0\n", "a.ts")
    assert (network.ports, network.s[0].real.tolist()) == (2, [[1, 3], [2, 4]])


def test_numbers_that_are_none_leave_their_entry_out(tmp_path: Path) -> None:
    network = read_text(tmp_path, "# GHz S DB R 50\n1 -3 0\n2 -inf 0\n3 -1.#IND 0\n4 9.9E37 0\n", "a.s1p")
    assert np.isnan(network.s[1:]).all() and abs(network.s[0, 0, 0]) == pytest.approx(10 ** (-3 / 20))
    assert [(one.line, one.token, one.text) for one in network.holes] == [
        (3, 2, "-inf"), (4, 2, "-1.#IND"), (5, 2, "9.9E37"),
    ]  # fmt: skip


def test_a_falling_sweep_and_a_frequency_twice_are_said(tmp_path: Path) -> None:
    falling = read_text(tmp_path, "# GHz S RI R 50\n3 1 0\n2 1 0\n1 1 0\n", "a.s1p")
    assert list(falling.axis) == [3, 2, 1] and "falls" in falling.remarks[0].what
    twice = read_text(tmp_path, "# GHz S RI R 50\n1 1 0\n2 1 0\n2 0.9 0\n3 1 0\n", "a.s1p")
    [said] = twice.remarks
    assert (said.line, said.warns) == (4, True) and "2 stands twice" in said.what


# --- what is refused, with its line

TWO = "# GHz S RI R 50\n"
FULL = "-0.3 0 0.6 0 0.6 0 -0.3 0"


@pytest.mark.parametrize(
    ("name", "text", "line", "words"),
    [
        # the shape of a published file with a number missing: never shifted
        ("a.s2p", f"! x\n{TWO}000500000 -0.3 0 0.6 0 0.6 0 -0.3\n001382728 {FULL}\n", 3, "8 numbers, 9 are expected"),
        ("a.s2p", f"{TWO}1 {FULL}\n2 -0.3 0 0.6 0 0.6 0 -0.3\n3 {FULL}\n", 3, "8 numbers"),
        ("a.s2p", f"{TWO}1 {FULL}\n2 {FULL} 7\n3 {FULL}\n", 3, "10 numbers"),
        ("a.s2p", f"{TWO}1 {FULL}\n2 {FULL} 7 8\n3 {FULL}\n", 3, "11 numbers, 9 are expected"),
        ("a.s2p", f"{TWO}1 {FULL}\n2 -0.3 0 0.6 0\n3 {FULL}\n", 3, "no noise block begins at 2"),
        ("a.s2p", f"{TWO}1 {FULL}\n2 {FULL}\n1 1 0.5 0 0.1\n2 {FULL}\n", 5, "9 numbers in the noise block"),
        ("a.s2p", f"{TWO}1 {FULL}\n3 {FULL}\n2 {FULL}\n", 4, "goes back from 3 to 2"),
        ("a.s3p", "# GHz S RI R 50\n1 1 0 2 0 3 0\n4 0 5 0 6\n7 0 8 0 9 0\n", 3, "5 numbers, 6 are expected"),
        ("a.s3p", "# GHz S RI R 50\n1 1 0 2 0 3 0\n4 0 5 0\n6 0 7 0 8 0 9 0\n2 1 0 2 0 3 0\n4 0 5 0 6 0\n7 0 8 0 9 0\n",
         2, "do not end with the rows"),
        ("a.s3p", "# GHz S RI R 50\n1 1 0 2 0 3 0\n4 0 5 0 6 0\n7 0 8 0 9 0\n2 1 0 2 0 3 0\n4 0 5 0 6 0\n",
         6, "the file ends within"),
        ("a.s1p", "1 1 0\n", 1, "no option line"),
        ("a.s1p", "1 1 0\n# GHz S RI R 50\n2 1 0\n", 2, "above the option line"),
        ("a.s1p", "# GHz S RI R 50\n1 1 0\n2 1,5 0\n", 3, "'1,5' (number 2 of the line)"),
        ("a.s1p", "# GHz S RI R 50\n1 1_0 0\n", 2, "'1_0'"),
        ("a.s1p", "# GHz S RI R 50\n1 ١ 0\n", 2, "is no number"),
        ("a.s1p", "# GHz S RI R 50\nnan 1 0\n", 2, "the frequency is no number"),
        ("a.s1p", "# ns S RI R 50\n1 1 0\n", 1, "'ns' is no option"),
        ("a.s1p", "# GHz MHz S RI R 50\n1 1 0\n", 1, "GHZ and MHZ"),
        ("a.s1p", "# GHz S RI R\n1 1 0\n", 1, "no positive number of ohms"),
        ("a.s1p", "# GHz S RI R -50\n1 1 0\n", 1, "no positive number of ohms"),
        ("a.s2p", f"# GHz S RI R 50 75 50\n1 {FULL}\n", 1, "R has 3 values for 2 ports"),
        ("a.s2p", f"# GHz Z RI R 50 75\n1 {FULL}\n", 1, "not defined"),
        ("a.s1p", "# GHz H RI R 50\n1 1 0\n", 1, "belong to two-ports"),
        ("a.ts", "# GHz S RI R 50\n1 1 0 2 0\n", 2, "2n²+1"),
        ("a.s1p", "[Number of Ports] 1\n# GHz S RI\n1 1 0\n", 1, "[Version] is missing"),
    ],
)  # fmt: skip
def test_what_cannot_be_read_rightly_is_refused_with_its_line(
    tmp_path: Path, name: str, text: str, line: int, words: str
) -> None:
    with pytest.raises(FileError) as caught:
        read_text(tmp_path, text, name)
    assert caught.value.where == f"{name}, line {line}" and words in caught.value.message
    assert caught.value.message.startswith("not readable as a Touchstone file") and caught.value.hint


def test_an_ending_that_contradicts_the_rows_is_refused(tmp_path: Path) -> None:
    with pytest.raises(
        FileError, match="says 3 ports, each frequency has 9 numbers, which is 2 ports"
    ) as caught:
        read_text(tmp_path, f"{TWO}1 {FULL}\n2 {FULL}\n", "a.s3p")
    assert "a.s3p, line 2" in caught.value.where and ".s2p" in caught.value.hint


VERSION_2: dict[str, str] = {
    "version": "[Version] 2.0\n",
    "option": "# GHz S RI\n",
    "ports": "[Number of Ports] 2\n",
    "order": "[Two-Port Data Order] 21_12\n",
    "count": "[Number of Frequencies] 2\n",
    "reference": "",
    "format": "",
    "network": "[Network Data]\n",
    "data": f"1 {FULL}\n2 {FULL}\n",
    "end": "[End]\n",
}


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"order": ""}, "S12 and S21 cannot be told apart"),
        ({"order": "[Two-Port Data Order] 22_11\n"}, "'22_11' is not known"),
        ({"ports": ""}, "needs [Number of Ports]"),
        ({"network": ""}, "needs [Network Data]"),
        ({"ports": "[Number of Ports] two\n"}, "is no count"),
        ({"count": "[Number of Frequencies] 3\n"}, "2 rows of frequency are there, 3 are declared"),
        ({"data": f"1 {FULL}\n2 -0.3 0 0.6 0 0.6 0 -0.3\n"}, "does not have 9 numbers"),
        ({"data": f"1 {FULL} 5\n2 {FULL[:-2]}\n"}, "does not have 9 numbers"),
        ({"format": "[Matrix Format] Diagonal\n"}, "'Diagonal' is not known"),
        ({"reference": "[Reference] 50\n"}, "1 values for 2 ports"),
        ({"reference": "[Reference] 50 -1\n"}, "no positive resistance"),
        ({"reference": "[Speed] 5\n"}, "[Speed] is not known"),
        ({"count": "[Number of Frequencies] 2\n[Number of Frequencies] 2\n"}, "stands here and in line"),
        ({"version": "[Version] 3.0\n"}, "'3.0' is not known"),
        ({"option": "# GHz S RI\n5 5 5\n"}, "outside [Reference]"),
        ({"format": "[Mixed-Mode Order] D1,2\n"}, "1 modes for 2 ports"),
        ({"format": "[Begin Information]\n"}, "no [End Information]"),
    ],
)
def test_version_2_is_held_to_its_keywords(tmp_path: Path, change: dict[str, str], words: str) -> None:
    assert read_text(tmp_path, "".join(VERSION_2.values()), "a.s2p").s[0, 1, 0] == 0.6
    with pytest.raises(FileError) as caught:
        read_text(tmp_path, "".join((VERSION_2 | change).values()), "a.s2p")
    assert words in caught.value.message and ", line " in caught.value.where


def test_a_version_2_file_without_an_end_is_read_where_every_count_comes_out(tmp_path: Path) -> None:
    network = read_text(tmp_path, "".join((VERSION_2 | {"end": "", "count": ""}).values()), "a.s2p")
    assert len(network.axis) == 2 and sum(one.warns for one in network.remarks) == 2


def test_ports_of_the_ending_and_the_keyword_must_agree(tmp_path: Path) -> None:
    with pytest.raises(FileError, match=r"the ending says 4 ports, \[Number of Ports\] 2"):
        read_text(tmp_path, "".join(VERSION_2.values()), "a.s4p")


# --- what a person must settle


def doubts(tmp_path: Path, text: str, name: str = "a.s2p") -> list[tuple[DoubtKind, int]]:
    return [(one.kind, one.line) for one in read_text(tmp_path, text, name).doubts]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (f"! Freq S11 S12 S21 S22\n{TWO}1 {FULL}\n", [(DoubtKind.COLUMN_ORDER, 1)]),
        (f"! Freq S(1,1) S(2,1) S(1,2) S(2,2)\n{TWO}1 {FULL}\n", []),
        (f"! freq reS11 imS11 reS21 imS21 reS12 imS12 reS22 imS22\n{TWO}1 {FULL}\n", []),
        (f"! freq magS11 angS11 magS21 angS21 magS12 angS12 magS22 angS22\n{TWO}1 {FULL}\n",
         [(DoubtKind.PAIR_FORMAT, 1)]),
        (f"! Params: S11 S21 S12 S22\n{TWO}1 {FULL}\n", []),
        (f"! Pin(dBm) S11 S21 S12 S22\n{TWO}1 {FULL}\n", [(DoubtKind.X_AXIS, 1)]),
        (f"{TWO}! power  dB(S11) dB(S21) dB(S12) dB(S22)\n1 {FULL}\n",
         [(DoubtKind.X_AXIS, 2), (DoubtKind.PAIR_FORMAT, 2)]),
        (f"! Power sweep at 28 GHz\n{TWO}1 {FULL}\n", [(DoubtKind.X_AXIS, 1)]),
        (f"! Sweep type: Power\n{TWO}1 {FULL}\n", [(DoubtKind.X_AXIS, 1)]),
        (f"! Sweep type: Lin Frequency\n! Source power: -10 dBm\n{TWO}1 {FULL}\n", []),
        (f"{TWO}-30 {FULL}\n-20 {FULL}\n", [(DoubtKind.X_AXIS, 2)]),
        ("# GHz S MA R 50\n1 -20 0 -3 0 -3 0 -20 0\n", [(DoubtKind.PAIR_FORMAT, 2)]),
    ],
)  # fmt: skip
def test_comments_that_speak_against_the_format_are_doubts(
    tmp_path: Path, text: str, expected: list[tuple[DoubtKind, int]]
) -> None:
    assert sorted(doubts(tmp_path, text)) == sorted(expected)


def test_a_transposed_list_of_a_three_port_is_a_doubt(tmp_path: Path) -> None:
    rows = "1 1 0 2 0 3 0\n4 0 5 0 6 0\n7 0 8 0 9 0\n"
    columns = "! freq S11 S21 S31\n! S12 S22 S32\n! S13 S23 S33\n"
    assert doubts(tmp_path, f"# GHz S RI R 50\n{columns}{rows}", "a.s3p") == [(DoubtKind.COLUMN_ORDER, 2)]
    plain = "! freq S11 S12 S13\n! S21 S22 S23\n! S31 S32 S33\n"
    assert doubts(tmp_path, f"# GHz S RI R 50\n{plain}{rows}", "a.s3p") == []


def test_ports_of_the_analyser_are_said(tmp_path: Path) -> None:
    network = read_text(tmp_path, f"! S33 S13 S31 S11\n{TWO}1 {FULL}\n", "a.s2p")
    [said] = [one for one in network.remarks if one.warns]
    assert "port 1 is 3, port 2 is 1" in said.what and not network.doubts


def test_an_impedance_in_a_comment_that_is_not_the_reference_is_doubted(tmp_path: Path) -> None:
    network = read_text(tmp_path, "! Z0 = 75 Ohm\n# GHz S RI R 50\n1 1 0\n", "a.s1p")
    [doubt] = network.doubts
    assert (doubt.kind.value, doubt.line) == ("reference", 1)
    assert "75 ohm" in doubt.what and "R 50" in doubt.what
    nearly = read_text(tmp_path, "! Z0 = 50.5 Ohm\n# GHz S RI R 50\n1 1 0\n", "a.s1p")
    [said] = nearly.remarks
    assert "50.5 ohm" in said.what and said.warns and nearly.doubts == ()
    same = read_text(tmp_path, "! Z0 = 75 Ohm\n# GHz S RI R 75\n1 1 0\n", "a.s1p")
    assert not same.remarks


@pytest.mark.parametrize(
    ("name", "lines"), [("transistor_noise.s2p", 95), ("splitter_25c.S3P", 69), ("ten_port_sim.s10p", 58)]
)
def test_damaged_files_are_read_or_refused_and_never_worse(name: str, lines: int, tmp_path: Path) -> None:
    """Bytes changed, doubled, left out or cut off: a network or one clear refusal, within the time of a bare read."""
    draw = random.Random(name)
    good = b"\n".join((DATA / name).read_bytes().split(b"\n")[:lines])
    outcomes: Counter[str] = Counter()
    for _ in range(1500):
        content = bytearray(good)
        for _ in range(draw.randint(1, 4)):
            place = draw.randrange(len(content))
            match draw.randrange(4):
                case 0:
                    content[place] = draw.choice(b"0 \t\n\r!#[]-+.eE,;\x00\xff\xb0nS9")
                case 1:
                    content[place:place] = content[place : place + draw.randint(1, 40)]
                case 2:
                    del content[place : place + draw.randint(1, 40)]
                case _:
                    del content[place:]
            content = content or bytearray(b"#")
        try:
            network = read_text(tmp_path, bytes(content), name)
            assert network.s.shape == (len(network.axis), network.ports, network.ports)
            outcomes["read"] += 1
        except FileError as error:
            assert error.where and error.hint
            outcomes["refused"] += 1
    assert outcomes["read"] > 50 and outcomes["refused"] > 300, outcomes


@pytest.mark.parametrize(
    ("name", "yes"),
    [("a.s2p", True), ("A.S10P", True), ("a.ts", True), ("a.TS", True), ("a.s2", False), ("a.sp", False)],
)
def test_endings(name: str, yes: bool) -> None:
    assert is_touchstone(name) is yes


def test_content_that_is_no_text_is_refused(tmp_path: Path) -> None:
    reader: Callable[..., Any] = read_text
    with pytest.raises(FileError, match="no text file"):
        reader(tmp_path, bytes(range(32)) * 64, "a.s2p")
    with pytest.raises(FileError, match=r"no option line|no numbers"):
        reader(tmp_path, "! only a comment\n", "a.s2p")


#: Shapes of comments that analysers, simulators and data sheets put above their numbers; written by hand from memory.
HEADS = (
    "!Analyser A,N1,SN1,A.09.33\n!Date: Tuesday, March 20, 2012 15:54:45\n!Correction: S11(Full 2 Port(1,2))\n"
    "!S21(Full 2 Port(1,2))\n!S12(Full 2 Port(1,2))\n!S22(Full 2 Port(1,2))\n"
    "!S2P File: Measurements: S11, S21, S12, S22:\n",
    "! Created Tue Mar 20 2012\n! 2 Port Network Data from SP1.SP block\n"
    "! freq  reS11  imS11  reS21  imS21  reS12  imS12  reS22  imS22\n",
    "!S-PARAMETER DATA FILE\n!DATE: 20.03.2012\n!TRACE 1: S11   TRACE 2: S21\n!CAL POWER: -10 dBm\n"
    "!IF BANDWIDTH: 100 Hz\n",
    "! freq[Hz] Re(S11) Im(S11) Re(S21) Im(S21) Re(S12) Im(S12) Re(S22) Im(S22)\n",
    "! FREQ.      S11            S21           S12           S22\n"
    "! GHz   Real  Imag  Real  Imag  Real  Imag  Real  Imag\n",
    "! Data & Calibration Information:\n! Freq\tS11:SOLT2(ON)\tS21:SOLT2(ON)\tS12:SOLT2(ON)\tS22:SOLT2(ON)\n",
    "! TOUCHSTONE file generated by a field simulator\n! 3-D Solver: FD\n! Port 1: mode 1, f = 10 GHz\n"
    "! Port 2: mode 1\n",
    "! Vce = 2 V, Ic = 5 mA, measured from 0.1 GHz to 20 GHz\n! Output power at 1 dB compression: 12 dBm typical\n",
    "! Source power -20 dBm, IFBW 1 kHz, 201 points, start 1 GHz, stop 20 GHz\n! Temperature 23 C\n",
    "! measured from 0.1 GHz on, input at -20 dBm\n! Bias 3V, 20mA: S11 S21 S12 S22\n",
    "! power = -10 dBm\n! Sweep Type: Lin Frequency\n! Stimulus: Frequency\n",
)  # fmt: skip


@pytest.mark.parametrize("head", HEADS)
def test_usual_comments_raise_no_doubt(tmp_path: Path, head: str) -> None:
    assert doubts(tmp_path, f"{head}{TWO}1 {FULL}\n2 {FULL}\n") == []


@pytest.mark.parametrize(
    ("text", "kind", "line"),
    [
        (f"# GHz S RI R 50\n1000000000 {FULL}\n2000000000 {FULL}\n", DoubtKind.X_AXIS, 1),
        (f"# Hz S RI R 50\n1.5 {FULL}\n2.5 {FULL}\n", DoubtKind.X_AXIS, 1),
        ("# GHz S RI R 50\n1 -20 10 -3 170 -3 170 -20 5\n2 -20 90 -3 90 -3 90 -20 50\n3 -20 9 -3 90 -3 90 -20 50\n",
         DoubtKind.PAIR_FORMAT, 3),
        ("# GHz S RI R 50\n1 .1 10 .7 170 .7 170 .1 5\n2 .1 90 .7 90 .7 90 .1 50\n3 .1 9 .7 90 .7 90 .1 50\n",
         DoubtKind.PAIR_FORMAT, 2),
        ("# GHz S DB R 50\n1 .1 10 .7 170 .7 170 .1 5\n2 .1 90 .7 90 .7 90 .1 50\n3 .1 9 .7 90 .7 90 .1 50\n",
         DoubtKind.PAIR_FORMAT, 2),
        ("# GHz S MA R 50\n1 20 10 .3 17 40 10 20 5\n2 20 9 .3 9 40 90 20 5\n3 20 9 .3 90 40 90 20 50\n",
         DoubtKind.PAIR_FORMAT, 2),
    ],
)  # fmt: skip
def test_numbers_that_are_hardly_what_the_option_line_says(
    tmp_path: Path, text: str, kind: DoubtKind, line: int
) -> None:
    [(found, where)] = doubts(tmp_path, text)
    assert found is kind and where in (line, 2)


def test_comments_that_count_other_points_or_name_other_ends_are_said(tmp_path: Path) -> None:
    head = "! Points: 3\n! Start frequency: 0.000000001 GHz\n! Stop frequency:  3 GHz\n"
    network = read_text(tmp_path, f"{head}# GHz S RI R 50\n1 {FULL}\n2 {FULL}\n", "a.s2p")
    assert [(one.line, one.what) for one in network.remarks if one.warns] == [
        (1, "the comment counts 3 points, the file has 2"),
        (2, "the comment says start 0.000000001 GHz, the file has 1000000000 Hz"),
        (3, "the comment says stop 3 GHz, the file has 2000000000 Hz"),
    ]


def test_angles_that_look_like_radians_are_doubted(tmp_path: Path) -> None:
    rows = "".join(f"{k} 0.5 {-3.1 + 0.2 * k:.3f}\n" for k in range(1, 32))
    [said] = read_text(tmp_path, f"# GHz S MA R 50\n{rows}", "a.s1p").doubts
    assert "radians" in said.what


@pytest.mark.parametrize(
    "head",
    [
        "! Pin   S11 S21 S12 S22\n",
        "! P_in (dBm)   |S11| ang   |S21| ang   |S12| ang   |S22| ang\n",
        "! Input power sweep at 28 GHz, Pin from -30 to 10 dBm\n",
        "! swept power, CW frequency 28 GHz\n",
        "! Sweep: power\n",
        "! Frequency: 28 GHz (fixed), Pin swept\n",
        "! X axis: Vgs\n",
        "! start -30 dBm stop 10 dBm\n",
        "! Pin[dBm]  gain  phase\n",
        "! RF power (dBm)   S11   S21   S12   S22\n",
        "! freq = 28 GHz\n! power   S11   S21   S12   S22\n",
    ],
)
def test_comments_that_speak_of_another_x_axis_do(tmp_path: Path, head: str) -> None:
    assert DoubtKind.X_AXIS in [kind for kind, _ in doubts(tmp_path, f"{head}{TWO}1 {FULL}\n2 {FULL}\n")]


# --- spellings beside the format that have one meaning


@pytest.mark.parametrize(
    "rows",
    [
        "1.5 1.25 -3.0\n2.5 -0.125 300.0\n",
        "1.5D0 12.5D-1 -3.0d+00\n2.5D+00 -0.125 3.D2\n",
        "1,5 1,25 -3,0\n2,5 -1,25E-1 300,0\n",
        "1,5\t1,25\t-3\n2,5\t-0,125\t3E2\n",
        "1.5,1.25,-3.0\n2.5, -0.125, 3e2,\n",
        "1.5;1.25;-3.0\n2.5;-0.125;3e2\n",
        "1,5;1,25;-3,0\n2,5;-0,125;300\n",
        "1.5 1.25 -3.0\n2.5 -0.125 300\n\x1a\x1a\n",
        "1.5 1.25 -3.0\r\n2.5 -0.125 300\x1a",
        "freq reS11 imS11\n1.5 1.25 -3.0\n2.5 -0.125 300\n",
    ],
)
def test_spellings_with_one_meaning_are_read_as_the_plain_one(tmp_path: Path, rows: str) -> None:
    network = read_text(tmp_path, f"# GHz S RI R 50\n{rows}", "a.s1p")
    assert network.axis.tolist() == [1.5, 2.5] and network.doubts == ()
    assert network.s[:, 0, 0].tolist() == [1.25 - 3j, -0.125 + 300j]
    assert network.place(1, 0, 0)[1] == 2
    is_said = any(one in rows for one in (",", ";", "freq"))
    assert bool(network.remarks) is is_said


@pytest.mark.parametrize(
    ("rows", "line", "words"),
    [
        ("1,500 1,250 3,125\n", 2, "a decimal comma, or one between thousands"),
        ("1.5 1.25 0.5\n2.5 1,25 0.5\n", 3, "'1,25' (number 2 of the line)"),
        ("1.5,,0.5\n2.5,1.25,0.5\n", 2, "number 2 of the line is missing"),
        ("1.5;;0.5\n2.5;1.25;0.5\n", 2, "number 2 of the line is missing"),
        ("1.5,1.25 0.5 0.5\n2.5,1.25,0.5\n", 2, "the row has 4 numbers"),
        ("1.5D 1.25 0.5\n", 2, "'1.5D'"),
        ("1.5 1.25 0.5\n2.5 1.25 0.5\nfreq reS11 imS11\n", 4, "'freq'"),
        ("freq S11 12\n1.5 1.25 0.5\n", 2, "'freq'"),
        ("measured by somebody\n1.5 1.25 0.5\n", 2, "'measured'"),
        ("1.5 1.25 0.5\n\x1a\n2.5 1.25 0.5\n", 3, "no number"),
    ],
)
def test_what_has_two_meanings_or_none_is_still_refused(
    tmp_path: Path, rows: str, line: int, words: str
) -> None:
    with pytest.raises(FileError) as caught:
        read_text(tmp_path, f"# GHz S RI R 50\n{rows}", "a.s1p")
    assert caught.value.where == f"a.s1p, line {line}" and words in caught.value.message


@pytest.mark.parametrize("word", ["-nan(ind)", "nan(0x8000)", "-nan", "1,#IND", "*****", "+inf", "1.#QNAN"])
def test_every_mark_of_no_number_leaves_its_entry_out(tmp_path: Path, word: str) -> None:
    network = read_text(tmp_path, f"# GHz S DB R 50\n1 -3 0\n2 {word} 0\n", "a.s1p")
    assert [(one.line, one.token, one.text) for one in network.holes] == [(3, 2, word)]


def test_a_line_of_column_names_that_is_no_comment_is_looked_at_as_one(tmp_path: Path) -> None:
    names = "freq magS11 angS11 magS12 angS12 magS21 angS21 magS22 angS22"
    network = read_text(tmp_path, f"# GHz S MA R 50\n{names}\n1 0.1 0 0.2 0 0.3 0 0.4 0\n", "a.s2p")
    assert [one.kind.value for one in network.doubts] == ["column order"]


@pytest.mark.parametrize("option", ["# GHz S RI R 75 Ohm", "# R 75 Ω GHz S RI", "# THz S RI R 75 ohms"])
def test_words_of_an_option_line_that_other_programs_write(tmp_path: Path, option: str) -> None:
    network = read_text(tmp_path, f"{option}\n1 1 0\n", "a.s1p")
    assert network.reference_ohm.tolist() == [75.0]
    assert network.frequency_hz.tolist() == [1e12 if "THz" in option else 1e9]


@pytest.mark.parametrize("matrix", ["-1 0", "1e14 0 1e14 0 1e14 0 1e14 0"], ids=["minus R", "twice"])
def test_impedances_that_have_no_s_are_left_out_and_said(tmp_path: Path, matrix: str) -> None:
    """Z + R is not invertible, or loses all digits (two ports with the same row); no S is made up."""
    ports = 1 if len(matrix.split()) == 2 else 2
    plain = " ".join(["3 0", "0 0", "0 0", "3 0"][: ports * ports])
    network = read_text(tmp_path, f"# GHz Z RI R 1\n1 {matrix}\n2 {plain}\n", f"a.s{ports}p")
    assert np.isnan(network.s[0]).any() and network.s[1, 0, 0] == pytest.approx(0.5)
    [said] = [one for one in network.remarks if one.warns]
    assert (said.line, "1 of 2 frequencies have no S" in said.what) == (2, True)


def test_real_and_imaginary_parts_under_db_are_doubted(tmp_path: Path) -> None:
    """Read as dB and degrees they would be a lossless part; a real one has reflections far below 0 dB."""
    rows = "".join(f"{k} -0.1 0.2 0.6 -0.7 0.6 -0.7 0.05 -0.1\n" for k in range(1, 5))
    [doubt] = read_text(tmp_path, f"# GHz S DB R 50\n{rows}", "a.s2p").doubts
    assert doubt.kind.value == "format" and "no number is beyond 1" in doubt.what
    thru = "".join(f"{k} -30 0.2 -0.1 -0.7 -0.1 -0.7 -31 -0.1\n" for k in range(1, 5))
    assert read_text(tmp_path, f"# GHz S DB R 50\n{thru}", "a.s2p").doubts == ()
