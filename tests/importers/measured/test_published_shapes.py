"""Tables in whatever shape others published them come in with a mapping at most, and say what their origin says.

The facts were computed independently of this program, with openpyxl, csv and numpy. Files that may not be copied here
are read where their folder lies beside the checkout.
"""

from __future__ import annotations

import numpy as np
import pytest

from specflow.importers.measurements import MeasuredTable, Measurements, read_measurements
from specflow.model.evidence import SOURCE_COLUMN, TableMapping
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_parameter, a_snapshot, an_item
from tests.importers.measured.make import taken
from tests.published import BESIDE, DATA

OWN_PARAMETERS = (
    a_parameter("threshold_voltage", unit="V", log_factor=None),
    a_parameter("linear_current", unit="A/m", log_factor=None),
    a_parameter("saturation_current", unit="A/m", log_factor=None),
    a_parameter("target_current", unit="A", log_factor=None),
    a_parameter("receiver_voltage", unit="dBµV"),
    a_parameter("radiation_intensity", unit="1", log_factor=None),
)


def published(name: str, *stored: TableMapping, with_mapping: bool = True) -> Measurements:
    path = DATA / name if (DATA / name).exists() else BESIDE / name
    if not path.exists():
        pytest.skip(f"{name} may not be copied into the tests")
    mapping = (DATA / "mappings" / name).with_suffix(".toml").read_text(encoding="utf-8")
    return read_measurements(
        path,
        a_snapshot(a_block(), an_item(), *OWN_PARAMETERS, *stored),
        load_dictionary(OWN_PARAMETERS),
        mapping=mapping if with_mapping else "",
        stated={"block": "LNA", "item": "LNA-1"},
    )


def cell(table: MeasuredTable, name: str, place: int) -> tuple[int, int]:
    """Row and column of a record in its sheet."""
    assert table.document is not None and table.columns is not None
    column = next(one.column for one in table.document.values if one.name == name)
    return table.document.cell(int(table.columns.source_rows[place]), column)


def trace(table: MeasuredTable) -> tuple[np.ndarray, np.ndarray]:
    """Frequency in Hz and values of the only value column."""
    columns = taken(table).columns
    assert columns is not None and columns.conditions.units["frequency"] == "Hz"
    [values] = columns.values.values()
    return columns.conditions.numeric["frequency"], values.low


def test_parameters_at_corners_with_the_device_in_a_column_without_header() -> None:
    [table] = published("device_corner_spec.xlsx").tables
    columns = taken(table).columns
    assert columns is not None
    device, corner = columns.conditions.text["device"], columns.conditions.text["corner"]
    said = {
        (device.word(row)[:4], corner.word(row)): tuple(
            float(one.low[row]) for one in columns.values.values()
        )
        for row in range(6)
    }
    assert [said["nmos", one][0] for one in ("typical", "ff", "ss")] == [0.8403, 0.7108, 0.9707]
    assert [said["pmos", one][2] for one in ("typical", "ff", "ss")] == [-260.01, -320.74, -200.7]
    assert cell(table, "Idsat/W", 1) == (13, 7) and said["nmos", "ff"][2] == 626.38


def test_a_header_of_three_rows_with_voltages_as_headers() -> None:
    results, targets = published("radio_dc_power_modes.xlsx").tables
    columns = taken(results).columns
    assert columns is not None
    power, current = columns.values["Total Power"].low, columns.values["Effective Current 7.2"].low
    assert [round(float(one), 4) for one in power[2:]] == [1259.6706, 2118.4118]
    assert (results.rows, results.rejected, round(float(current.sum()), 4)) == (4, (), 36.9149)
    assert [cell(results, "Total Power", row) for row in (2, 3)] == [(11, 20), (12, 20)]
    columns = taken(targets).columns
    assert columns is not None
    at = columns.conditions.numeric["supply_voltage"]
    assert sorted(set(at)) == [1.8, 2.7, 5.0]
    assert list(columns.values["target_current"].low[at == 2.7]) == [39, 16, 21, 29]
    assert dict(targets.blank) == {
        "nothing written": 2
    }  # blank means zero there; nothing says so in the file


def test_a_chain_with_blank_columns_and_its_totals_beside_their_labels() -> None:
    chain, totals, result = published("rx_noise_temp_chain.xlsx").tables
    columns = taken(chain).columns
    assert columns is not None
    gain, figure = columns.values["Gain/Loss"].low, columns.values["Noise Fig"].low
    assert (chain.rows, gain[2], figure[2]) == (12, 17, 0.44) and np.isnan(gain[11])
    assert taken(totals).columns is not None and totals.columns is not None
    assert totals.columns.values["Total"].low[0] == pytest.approx(164.5018, abs=5e-5)
    assert totals.columns.values["Ts"].low[0] == pytest.approx(304.5018, abs=5e-5)
    assert (cell(totals, "Total", 0), cell(totals, "Ts", 0)) == ((24, 11), (26, 11))
    assert taken(result).columns is not None and result.columns is not None
    assert result.columns.values["T_eff"].low[0] == pytest.approx(54.5368, abs=5e-5)


def test_field_strength_from_text_in_sections() -> None:
    [table] = published("field_scan_sections.csv").tables
    frequency, level = trace(table)
    assert (len(level), frequency[0], frequency[-1]) == (801, 10e6, 20e6)
    assert level.max() == pytest.approx(27.5876, abs=5e-5) and frequency[level.argmax()] == 10.5e6
    assert level.min() == pytest.approx(13.2090, abs=5e-5)
    assert level[frequency == 15e6] == pytest.approx(19.8413, abs=5e-5)
    assert cell(table, "Trace 1", 0) == (137, 1)
    assert table.document is not None and table.document.values[0].unit == "dBµV/m"
    assert "azimuth" not in {
        one.dimension for one in table.document.conditions
    }  # an aerial that is not in use says 0


def test_a_monopole_in_the_same_sections() -> None:
    [table] = published("monopole_scan_sections.csv").tables
    frequency, level = trace(table)
    assert (len(level), frequency[0], frequency[-1]) == (2401, 200e3, 30e6)
    assert level.max() == pytest.approx(97.8001, abs=5e-5) and level.min() == pytest.approx(42.0191, abs=5e-5)
    assert frequency[level.argmax()] == pytest.approx(336583.33, abs=0.01)


def test_three_traces_of_which_two_were_never_swept() -> None:
    [table] = published("sa_three_trace.CSV").tables
    frequency, level = trace(table)
    assert (len(level), frequency[0], frequency[-1]) == (401, 500e6, 1000e6)
    assert (level.max(), frequency[level.argmax()], level.min()) == (21.1733, 882.5e6, 2.4583)
    assert cell(table, "Trace 1", 0) == (16, 2)
    assert sum("never swept" in note for note in table.notes) == 2


def test_a_sweep_from_0_hz() -> None:
    [table] = published("sa_zero_hz_nul.CSV").tables
    frequency, level = trace(table)
    assert (len(level), frequency[0], frequency[-1], level[0]) == (461, 0, 3e9, 3.54)
    inside = frequency > 0
    assert level[inside].max() == -47.16 and level.min() == -57.97
    assert frequency[inside][level[inside].argmax()] == pytest.approx(2973913043.478261)


def test_a_matrix_over_the_sphere() -> None:
    [table] = published("horn_intensity_grid.csv").tables
    columns = taken(table).columns
    assert columns is not None
    theta, phi = columns.conditions.numeric["theta"], columns.conditions.numeric["phi"]
    values = columns.values["radiation_intensity"].low
    assert (len(values), theta.max(), phi.max()) == (181 * 361, 180, 360)
    assert values.max() == pytest.approx(3425864.294) and theta[values.argmax()] == 0
    assert values.min() == pytest.approx(6.65771) and 10 * np.log10(
        values.max() / values.min()
    ) == pytest.approx(57.11, abs=5e-3)
    grid = values.reshape(361, 181).T  # one column after the other
    weights = np.sin(np.radians(np.arange(181)))[:, None]
    total = np.trapezoid(np.trapezoid(grid * weights, dx=np.radians(1), axis=1), dx=np.radians(1))
    assert 10 * np.log10(4 * np.pi * values.max() / total) == pytest.approx(17.151, abs=5e-4)
    assert columns.extra[SOURCE_COLUMN].word(len(values) - 1) == "MW"


def test_phase_noise_beside_prose() -> None:
    twice, thrice = published("lo_phase_noise.xlsx").tables
    first, second = taken(twice).columns, taken(thrice).columns
    assert first is not None and second is not None
    low, high = first.values["dBc"].low, second.values["dBc"].low
    assert (low[1], high[1], first.conditions.numeric["offset"][1]) == (-80, -77, 10e3)
    assert set(high - low) == {3} and len(low) == 5
    assert cell(twice, "dBc", 0) == (6, 11) and cell(thrice, "dBc", 4) == (19, 11)


def test_two_tables_that_share_a_row() -> None:
    single, curve = published("exposure_vs_distance.xlsx").tables
    columns = taken(curve).columns
    assert columns is not None
    distance, density = columns.conditions.numeric["distance"], columns.values["Sff"].low
    assert (len(distance), distance[0], distance[-1]) == (400, 10, 2005)
    assert density[0] == pytest.approx(318.3099, abs=5e-5) and density[-1] == pytest.approx(
        0.007918, abs=5e-7
    )
    assert distance[density <= 1][0] == 180 and distance[columns.values["Sff2"].low <= 1][0] == 170
    assert set(columns.conditions.numeric["frequency"]) == {5.66e9}
    assert curve.document is not None
    assert (
        next(one for one in curve.document.conditions if one.dimension == "frequency").stated_by
        == "stated in C16"
    )
    assert single.columns is not None and taken(single).document is not None
    assert single.columns.values["GdB"].low[0] == pytest.approx(26.0206, abs=5e-5)
    assert cell(single, "GdB", 0) == (13, 3)


def test_two_stacked_traces_with_their_settings() -> None:
    magnitude, phase = published("bench_s21_mag_phase.csv").tables
    frequency, gain = trace(magnitude)
    assert (len(gain), gain[0], gain.max(), gain[-1]) == (201, 1.006368, 23.83782, -15.42097)
    assert frequency[gain.argmax()] == 599500 and cell(magnitude, "Formatted Data", 0) == (14, 1 + 1)
    _, degrees = trace(phase)
    assert (len(degrees), degrees[-1]) == (201, 178.0860) and degrees[0] == pytest.approx(22.0113, abs=5e-5)
    assert (degrees.min(), degrees.max()) == (-179.4759, 179.9707)
    assert phase.document is not None and phase.document.values[0].quantity.parameter == "phase"


@pytest.mark.parametrize(
    "name",
    [
        "device_corner_spec.xlsx",
        "radio_dc_power_modes.xlsx",
        "field_scan_sections.csv",
        "lo_phase_noise.xlsx",
    ],
)
def test_the_next_file_of_the_kind_needs_nothing(name: str) -> None:
    first = published(name)
    stored = {table.layout_key: table.mapping for table in first.tables}
    kept = [
        TableMapping(id=f"M-{n}", layout_key=key, toml=toml) for n, (key, toml) in enumerate(stored.items())
    ]
    again = published(name, *kept, with_mapping=False)
    assert [table.place for table in again.tables] == [table.place for table in first.tables]
    assert [table.values for table in again.tables] == [table.values for table in first.tables]
    assert all("recognised by its layout" in table.mapping_from for table in again.tables)
