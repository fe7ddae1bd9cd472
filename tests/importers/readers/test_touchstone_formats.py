"""Touchstone in every variant of the format: written by rules, read back exactly, and read by scikit-rf as well."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays

from specflow.importers.readers.source import read_source
from specflow.importers.readers.touchstone import read_network
from tests.importers.readers.touchstone_writer import Written, read_text, text_of

skrf = pytest.importorskip("skrf")
DATA = Path(__file__).parents[2] / "data"
PUBLISHED = ("transistor_noise.s2p", "four_port_75ohm.s4p", "splitter_25c.S3P", "ten_port_sim.s10p", "lowpass_25c.s2p",
             "lowpass_125c.s2p", "mmwave_tx_140_220ghz.S2P")  # fmt: skip


@pytest.mark.parametrize("name", PUBLISHED)
def test_published_files_read_as_scikit_rf_reads_them(name: str) -> None:
    ours, theirs = read_network(read_source(DATA / name)), skrf.Network(str(DATA / name))
    assert ours.ports == theirs.nports
    np.testing.assert_allclose(ours.frequency_hz, theirs.f, rtol=1e-15)
    np.testing.assert_allclose(ours.s, theirs.s, rtol=1e-12, atol=1e-15)
    if ours.impedances is None:
        np.testing.assert_allclose(np.broadcast_to(ours.reference_ohm, theirs.z0.shape), theirs.z0.real)
    else:
        np.testing.assert_allclose(ours.impedances, theirs.z0, rtol=1e-12)
    if ours.noise is not None:
        np.testing.assert_allclose(ours.noise.fmin_db, theirs.nfmin_db[: len(ours.noise.axis)], rtol=1e-9)


def random_pairs(ports: int, pair_format: str, frequencies: int = 3, seed: int = 7) -> np.ndarray:
    draw = np.random.default_rng(seed)
    pairs = draw.uniform(-1, 1, (frequencies, ports, ports, 2))
    if pair_format != "RI":
        pairs[..., 1] *= 180
    if pair_format == "MA":
        pairs[..., 0] = np.abs(pairs[..., 0])
    if pair_format == "DB":
        pairs[..., 0] = -40 * np.abs(pairs[..., 0])
    return pairs


def complex_of(pairs: np.ndarray, pair_format: str) -> np.ndarray:
    first, second = pairs[..., 0], pairs[..., 1]
    if pair_format == "RI":
        return first + 1j * second
    return (first if pair_format == "MA" else 10 ** (first / 20)) * np.exp(1j * np.deg2rad(second))


@pytest.mark.parametrize("ports", [1, 2, 3, 4, 5, 10])
@pytest.mark.parametrize("pair_format", ["DB", "MA", "RI"])
@pytest.mark.parametrize("unit", ["Hz", "kHz", "MHz", "GHz"])
def test_version_1_of_all_sizes_and_formats(tmp_path: Path, ports: int, pair_format: str, unit: str) -> None:
    pairs = random_pairs(ports, pair_format)
    what = Written([1, 2.5, 1000], pairs, unit, "S", pair_format, [75])
    name = f"a.s{ports}p"
    ours = read_text(tmp_path, text_of(what), name)
    assert (ours.first == pairs[..., 0]).all() and (ours.second == pairs[..., 1]).all()
    np.testing.assert_allclose(ours.s, complex_of(pairs, pair_format), rtol=1e-12)
    theirs = skrf.Network(str(tmp_path / name))
    np.testing.assert_allclose(ours.s, theirs.s, rtol=1e-9)
    np.testing.assert_allclose(ours.frequency_hz, theirs.f)
    assert (ours.reference_ohm == 75).all() and (theirs.z0 == 75).all()


@pytest.mark.parametrize("version", ["2.0", "2.1"])
@pytest.mark.parametrize("ports", [1, 2, 3, 5])
@pytest.mark.parametrize("matrix_format", ["", "Full", "Lower", "Upper"])
@pytest.mark.parametrize("order", ["12_21", "21_12"])
def test_version_2_of_all_layouts(
    tmp_path: Path, version: str, ports: int, matrix_format: str, order: str
) -> None:
    pairs = random_pairs(ports, "RI")
    if matrix_format in ("Lower", "Upper"):
        pairs = pairs + pairs.transpose(0, 2, 1, 3)
    ohms = [40.0 + 10 * port for port in range(ports)]
    what = Written(
        [1, 2, 3], pairs, "GHz", "S", "RI", [], version, order, matrix_format, keyword_reference=ohms
    )
    ours = read_text(tmp_path, text_of(what), "a.ts")
    assert (ours.first == pairs[..., 0]).all() and (ours.second == pairs[..., 1]).all()
    assert (ours.version, list(ours.reference_ohm)) == (version, ohms)
    theirs = skrf.Network(str(tmp_path / "a.ts"))
    np.testing.assert_allclose(theirs.z0.real[0], ohms)
    if (ports, order, matrix_format in ("Lower", "Upper")) != (2, "21_12", True):
        # scikit-rf 2.2.0 leaves a real part unset in the triangular two-port of that order; ours is checked above
        np.testing.assert_allclose(ours.s, theirs.s, rtol=1e-12)


Convert = Callable[..., np.ndarray]


@pytest.mark.parametrize(
    ("parameter", "convert", "ports", "reference"),
    [
        ("Z", skrf.network.z2s, 3, [40.0, 60.0, 50.0]),
        ("Y", skrf.network.y2s, 3, [40.0, 60.0, 50.0]),
        ("Z", skrf.network.z2s, 2, [75.0, 75.0]),
        ("H", skrf.network.h2s, 2, [75.0, 75.0]),
        ("G", skrf.network.g2s, 2, [75.0, 75.0]),
    ],
)
def test_other_parameters_become_scattering_parameters_as_scikit_rf_makes_them(
    tmp_path: Path, parameter: str, convert: Convert, ports: int, reference: list[float]
) -> None:
    pairs = random_pairs(ports, "RI")
    matrix = complex_of(pairs, "RI")
    what = Written([1, 2, 3], pairs, "GHz", parameter, "RI", [], "2.0", "12_21", keyword_reference=reference)
    ours = read_text(tmp_path, text_of(what), "a.ts")
    z0 = np.broadcast_to(np.asarray(reference, complex), (3, ports))
    np.testing.assert_allclose(ours.s, convert(matrix, z0), rtol=1e-9)
    assert ours.conversion.startswith(f"S from {parameter} at ") and (ours.recorded == matrix).all()


@pytest.mark.parametrize(
    ("parameter", "convert"),
    [("Z", skrf.network.z2s), ("Y", skrf.network.y2s), ("H", skrf.network.h2s), ("G", skrf.network.g2s)],
)
def test_version_1_divides_by_the_reference(tmp_path: Path, parameter: str, convert: Convert) -> None:
    """Version 1 gives z = Z/R, y = Y·R; of h and g what has a dimension (Touchstone 2.1, Examples 10 and 11)."""
    pairs, r = random_pairs(2, "RI"), 75.0
    matrix = complex_of(pairs, "RI")
    scale = {"Z": [[r, r], [r, r]], "Y": [[1 / r, 1 / r], [1 / r, 1 / r]], "H": [[r, 1], [1, 1 / r]],
             "G": [[1 / r, 1], [1, r]]}[parameter]  # fmt: skip
    ours = read_text(tmp_path, text_of(Written([1, 2, 3], pairs, "GHz", parameter, "RI", [r])), "a.s2p")
    z0 = np.full((3, 2), r + 0j)
    np.testing.assert_allclose(ours.s, convert(matrix * scale, z0), rtol=1e-9)


def test_three_encodings_of_one_measurement_say_the_same(tmp_path: Path) -> None:
    """The shape of a published attenuator: dB, magnitude and real/imaginary with six decimals each."""
    value = complex_of(random_pairs(2, "MA", 200), "MA")
    found = []
    for pair_format in ("DB", "MA", "RI"):
        pairs = {
            "DB": np.stack([20 * np.log10(abs(value)), np.angle(value, deg=True)], -1),
            "MA": np.stack([abs(value), np.angle(value, deg=True)], -1),
            "RI": np.stack([value.real, value.imag], -1),
        }[pair_format]
        what = Written(list(range(1, 201)), np.round(pairs, 6), "MHz", "S", pair_format, [50])
        found.append(read_text(tmp_path, text_of(what), f"{pair_format}.s2p").s)
    np.testing.assert_allclose(found[0], found[1], atol=2e-6)
    np.testing.assert_allclose(found[1], found[2], atol=2e-6)


@st.composite
def networks(draw: st.DrawFn) -> Written:
    """Any network in any variant that the format allows."""
    version = draw(st.sampled_from(["", "2.0", "2.1"]))
    parameter = draw(st.sampled_from(["S", "S", "Y", "Z", "G", "H"]))
    ports = 2 if parameter in "GH" else draw(st.sampled_from([1, 2, 3, 4, 5, 6, 10]))
    count = draw(st.integers(1, 4))
    pair_format = draw(st.sampled_from(["DB", "MA", "RI"]))
    low = 0.0 if pair_format == "MA" else -1e3
    numbers = st.floats(low, 200.0 if pair_format == "DB" else 1e3, allow_subnormal=False)
    pairs = draw(arrays.arrays(np.float64, (count, ports, ports, 2), elements=numbers))
    axis = draw(st.lists(st.floats(0, 1e6), min_size=count, max_size=count, unique=True))
    matrix_format = draw(st.sampled_from(["", "Full", "Lower", "Upper"])) if version else ""
    if matrix_format in ("Lower", "Upper"):
        places = np.tril_indices(ports)
        pairs[:, places[1], places[0]] = pairs[:, places[0], places[1]]
    ohms = st.floats(0.1, 1e4)
    per_port = draw(st.lists(ohms, min_size=ports, max_size=ports))
    reference = draw(st.sampled_from([[], per_port[:1], per_port if parameter == "S" else per_port[:1]]))
    noise: list[list[float]] = []
    if ports == 2 and draw(st.booleans()):
        top = max(axis)
        noise = [[top / 2, 1.0, 0.25, -30.0, 0.125], [top + 1.0, 1.5, 0.5, 10.0, 0.25]]
    return Written(
        sorted(axis), pairs, draw(st.sampled_from(["Hz", "khz", "MHZ", "GHz"])), parameter, pair_format, reference,
        version, draw(st.sampled_from(["12_21", "21_12"])), matrix_format, noise,
        draw(st.lists(st.text("abc µ°\t#[!", max_size=12), max_size=3)), draw(st.sampled_from(["\n", "\r\n"])),
        bool(version == "" or draw(st.booleans())), draw(st.sampled_from([4, 2, 1])),
        per_port if version and draw(st.booleans()) else [],
    )  # fmt: skip


@settings(max_examples=300, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(networks())
def test_what_is_written_in_any_variant_is_read_exactly(tmp_path: Path, what: Written) -> None:
    named = f"a.s{what.ports}p"
    network = read_text(tmp_path, text_of(what), named)
    assert network.axis.tolist() == list(what.axis) and network.pair_format == what.pair_format
    assert network.first.tolist() == what.pairs[..., 0].tolist()
    assert network.second.tolist() == what.pairs[..., 1].tolist()
    stated = what.keyword_reference or what.reference or [50.0]
    expected = list(stated) if len(stated) == what.ports else list(stated) * what.ports
    assert network.reference_ohm.tolist() == expected
    if what.noise:
        noise = network.noise
        assert noise is not None
        rows = np.stack([noise.axis, noise.fmin_db, noise.magnitude, noise.angle_deg, noise.rn], -1)
        assert rows.tolist() == what.noise
        assert noise.rn_unit_ohm == (1.0 if what.version else expected[0])
    else:
        assert network.noise is None


@settings(max_examples=100, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(networks(), st.data())
def test_every_number_is_walked_back_to_its_place(tmp_path: Path, what: Written, data: st.DataObject) -> None:
    text = text_of(what)
    network = read_text(tmp_path, text, f"a.s{what.ports}p")
    k = data.draw(st.integers(0, len(what.axis) - 1))
    i, j = (data.draw(st.integers(0, what.ports - 1)) for _ in range(2))
    line, number = network.place(k, i, j)
    words = text.replace("\r\n", "\n").split("\n")[line - 1].split()
    assert float(words[number - 1]) == network.first[k, i, j]
    assert (
        float(text.replace("\r\n", "\n").split("\n")[int(network.lines[k]) - 1].split()[0]) == network.axis[k]
    )


@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(networks(), st.data())
def test_a_number_too_few_or_too_many_is_never_shifted(
    tmp_path: Path, what: Written, data: st.DataObject
) -> None:
    """One number of the data left out, or one doubled: the file is refused, or (never) read with other numbers."""
    from specflow.errors import FileError

    lines = text_of(what).replace("\r\n", "\n").split("\n")
    holding = [place for place, line in enumerate(lines) if line and line[0] not in "!#[" and " " in line]
    place = data.draw(st.sampled_from(holding))
    words = lines[place].split()
    spot = data.draw(st.integers(0, len(words) - 1))
    words = (
        words[:spot] + words[spot + 1 :]
        if data.draw(st.booleans())
        else [*words[:spot], words[spot], *words[spot:]]
    )
    changed = "\n".join([*lines[:place], " ".join(words), *lines[place + 1 :]])
    with pytest.raises(FileError) as caught:
        read_text(tmp_path, changed, f"a.s{what.ports}p")
    assert caught.value.where.startswith(f"a.s{what.ports}p") and caught.value.hint
