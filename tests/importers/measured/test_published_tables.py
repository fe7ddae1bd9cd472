"""Plain tables that others published come in with a mapping at most, and say what their origin says.

The facts were computed independently of this program, with csv and numpy. Two of the files may not be copied here;
their tests run where the folder lies beside the checkout.
"""

from __future__ import annotations

import numpy as np
import pytest

from specflow.importers.measurements import MeasuredTable, read_measurements
from specflow.model.evidence import SOURCE_COLUMN
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_parameter, a_snapshot, an_item
from tests.importers.measured.make import taken
from tests.published import BESIDE, DATA

OWN_PARAMETERS = (
    a_parameter("channel_power"),
    a_parameter("if_power_relative"),
    a_parameter("resistance", unit="Ω", log_factor=None),
)


def published(name: str, *, with_mapping: bool = True) -> MeasuredTable:
    path = DATA / name if (DATA / name).exists() else BESIDE / name
    if not path.exists():
        pytest.skip(f"{name} may not be copied into the tests")
    mapping = (DATA / "mappings" / name).with_suffix(".toml").read_text(encoding="utf-8")
    snapshot = a_snapshot(a_block(), an_item(), *OWN_PARAMETERS)
    read = read_measurements(
        path,
        snapshot,
        load_dictionary(OWN_PARAMETERS),
        mapping=mapping if with_mapping else "",
        stated={"block": "LNA", "item": "LNA-1"},
    )
    assert len(read.tables) == 1
    return read.tables[0]


def test_gain_of_the_digitiser() -> None:
    table = taken(published("digitiser_gain.csv"))
    assert table.columns is not None
    gain = table.columns.values["Gain"].low
    frequency = table.columns.conditions.numeric["frequency"]
    assert (table.rows, table.rejected, table.columns.conditions.units["frequency"]) == (2048, (), "Hz")
    assert (frequency[0], frequency[-1]) == (0.0, 856000000.0)
    assert gain.max() == 23.246386 and frequency[gain.argmax()] == pytest.approx(413154860.77, abs=0.01)
    assert gain.min() == -21.19583835
    nearest = int(np.abs(frequency - 400e6).argmin())
    assert (gain[nearest], frequency[nearest]) == (21.44834518, pytest.approx(400191499.76, abs=0.01))
    assert table.columns.values["Channel power"].low.max() == -42.18557921
    assert int(table.columns.source_rows[0]) == 7  # five comment lines and the header stand above


def test_a_unit_that_is_none_is_asked_about() -> None:
    table = published("digitiser_gain.csv", with_mapping=False)
    assert table.document is None
    [question] = table.questions
    assert question.cell == "B6" and "dBX" in question.what


def test_spill_over_of_a_dish_with_the_frequency_in_a_second_header_row() -> None:
    table = taken(published("spillover_vs_zenith_a.dat"))
    assert table.columns is not None and table.document is not None
    values = table.columns.values["antenna_noise_temperature"].low
    conditions = table.columns.conditions
    assert table.values == 18 * 16 * 2 and table.rejected == ()
    assert (values.max(), values.min()) == (2.8339, 0.9197)
    assert sorted(set(conditions.numeric["zenith"])) == list(range(0, 90, 5))
    assert len(set(conditions.numeric["frequency"])) == 16
    assert (conditions.units["frequency"], table.document.values[0].unit) == ("MHz", "K")

    def at(frequency: float, zenith: float, polarisation: str) -> tuple[float, int, str]:
        assert table.columns is not None
        is_it = (conditions.numeric["frequency"] == frequency) & (conditions.numeric["zenith"] == zenith)
        words = conditions.text["polarisation"]
        [row] = [row for row in np.flatnonzero(is_it).tolist() if words.word(row) == polarisation]
        return (
            float(values[row]),
            int(table.columns.source_rows[row]),
            table.columns.extra[SOURCE_COLUMN].word(row),
        )

    assert at(1410, 0, "H") == (1.6712, 4, "T")
    assert at(1410, 0, "V") == (1.6827, 4, "U")
    assert at(1410, 45, "H") == (1.3191, 13, "T")


def test_thermistor_mount_without_units() -> None:
    table = taken(published("thermistor_mount_vs_temp.csv"))
    assert table.columns is not None
    resistance = table.columns.values["Resistance"].low
    temperature = table.columns.conditions.numeric["temperature_case"]
    assert (len(resistance), resistance.min(), resistance.max()) == (14, 200.04165, 200.06257)
    assert (temperature.min(), temperature.max()) == (16.18989327, 29.69800221)
    assert np.polyfit(temperature, resistance, 1)[0] == pytest.approx(0.001597, abs=5e-7)


def test_hot_and_cold_load() -> None:
    table = taken(published("hot_cold_if_power.dat"))
    assert table.columns is not None
    levels = table.columns.values["if_power_relative"].low.reshape(2, 500)
    frequency = table.columns.conditions.numeric["frequency"][:500]
    load = table.columns.conditions.text["load"]
    assert (load.word(0), load.word(500)) == ("Hot", "Cold")
    assert (frequency.min(), frequency.max()) == (0.0, 19.96)
    hot, cold = levels[:, frequency == 4.0].ravel()
    assert (hot, cold) == (-24.51, -28.8133)
    y_factor = levels[0] - levels[1]
    assert y_factor[(frequency >= 4) & (frequency <= 8)].mean() == pytest.approx(4.4972, abs=5e-5)
    assert y_factor.min() == pytest.approx(-0.3634, abs=5e-5)
