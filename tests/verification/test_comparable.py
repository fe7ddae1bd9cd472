"""Only like compares with like: units, planes, statistics, bandwidths, polarisations; what is bridged is said."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.limits import parse_limit
from specflow.model.block import PlanePath
from specflow.model.evidence import SpectrumKind
from specflow.model.verdict import Label, RequirementStatus
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    a_value_column,
    an_evidence_table,
    at_least,
    at_most,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import results_of, status_of

POWER = a_quantity("output_power", plane="connector", statistic="average")


def measured(
    column: dict[str, object], limit: object, values: list[float], wanted: object = POWER, *documents: object
) -> RequirementStatus:
    """Return the status of a limit on ``wanted`` when a column of those fields was recorded."""
    recorded = a_value_column("P", **{"quantity": POWER, "unit": "dBm"} | column)
    table = an_evidence_table(values=(recorded,))
    requirement = a_requirement(quantity=wanted, limit=limit)
    return status_of(requirement, table, *documents, T_1=some_evidence({"P": values}))


def kinds(status: RequirementStatus) -> list[str]:
    return [mismatch.kind for mismatch in status.mismatches]


@pytest.mark.parametrize(
    ("changed", "kind", "words"),
    [
        ({"plane": ""}, "plane", "not stated"),
        ({"plane": "antenna face"}, "plane", "referred to antenna face, required at connector"),
        ({"statistic": "peak"}, "statistic", "peak, required is average"),
        ({"statistic": ""}, "statistic", "not stated"),
        ({"polarisation": "H"}, "polarisation", "the requirement states none"),
        ({"bandwidth_hz": 1e6}, "bandwidth", "the requirement states none"),
    ],
)
def test_a_difference_in_identity_is_a_mismatch_with_a_remedy(
    changed: dict[str, object], kind: str, words: str
) -> None:
    status = measured({"quantity": POWER.model_copy(update=changed)}, at_least(30, "dBm"), [40, 40, 40])
    assert kinds(status) == [kind]
    assert words in status.mismatches[0].what
    assert status.mismatches[0].remedy
    assert status.k == 0
    assert status.label is Label.PLANNED


def test_a_unit_of_another_kind_is_a_mismatch() -> None:
    status = measured({"unit": "V/m"}, at_least(30, "dBm"), [40, 40, 40])
    assert kinds(status) == ["unit"]


def test_a_unit_of_the_same_kind_is_converted_and_said() -> None:
    status = measured({"unit": "W"}, at_least(30, "dBm"), [1.0, 2.0, 0.5])
    assert (status.k, status.n_failing) == (2, 1)
    assert any("W to dBm" in remark for remark in status.remarks)


def test_uncertainty_follows_a_conversion_on_its_larger_side() -> None:
    """u of 10 % of 1 W is 0.41 dB upwards and 0.46 dB downwards; the larger is kept."""
    table = an_evidence_table(values=(a_value_column("P", quantity=POWER, unit="W"),))
    requirement = a_requirement(quantity=POWER, limit=at_least(29, "dBm"))
    status = status_of(requirement, table, T_1=some_evidence({"P": [1.0, 1.0, 1.0]}, u=0.1))
    assert status.activities[0].items["LNA-1"].u == pytest.approx(-10 * np.log10(0.9))


PATHS = (
    PlanePath(start="connector", end="duplexer", gain_db=-0.5, standard_uncertainty_db=0.3),
    PlanePath(start="duplexer", end="antenna face", gain_db=2.0, standard_uncertainty_db=0.4),
)


def test_a_declared_path_moves_a_level_between_planes_both_ways_with_its_uncertainty() -> None:
    there = POWER.model_copy(update={"plane": "antenna face"})
    forward = measured({}, at_least("31.5", "dBm"), [30, 30, 29.9], there, a_block(paths=PATHS))
    assert (forward.k, forward.n_failing) == (2, 1)
    assert forward.activities[0].items["LNA-1"].u == pytest.approx(0.5)
    assert any("by declared path" in remark for remark in forward.remarks)
    back = measured(
        {"quantity": there}, at_least("30", "dBm"), [31.5, 31.5, 31.4], POWER, a_block(paths=PATHS)
    )
    assert (back.k, back.n_failing) == (2, 1)


def test_a_ratio_does_not_move_with_a_gain() -> None:
    here, there = a_quantity(plane="connector"), a_quantity(plane="antenna face")
    table = an_evidence_table(values=(a_value_column(quantity=here),))
    status = status_of(a_requirement(quantity=there), table, a_block(paths=PATHS))
    assert kinds(status) == ["plane"]
    assert "does not move with a gain" in status.mismatches[0].what


NOISE = a_quantity("output_power", bandwidth_hz=1e6)
NARROW = NOISE.model_copy(update={"bandwidth_hz": 1e5})


@pytest.mark.parametrize(
    ("spectrum", "label"),
    [
        (SpectrumKind.NOISE_LIKE, Label.FAILING),
        (SpectrumKind.DISCRETE, Label.READY),
        (SpectrumKind.UNKNOWN, Label.INCONCLUSIVE),
    ],
)
def test_another_bandwidth_scales_noise_leaves_lines_and_only_bounds_what_is_unknown(
    spectrum: SpectrumKind, label: Label
) -> None:
    """-38 dBm in 100 kHz against -30 dBm in 1 MHz: noise is -28 dBm there, a line -38, unknown between the two."""
    status = measured({"quantity": NARROW, "spectrum": spectrum}, at_most(-30, "dBm"), [-38, -38, -38], NOISE)
    assert status.label is label


def test_an_unknown_spectrum_decides_where_both_readings_agree() -> None:
    good = measured({"quantity": NARROW}, at_most(-30, "dBm"), [-41, -41, -41], NOISE)
    assert good.label is Label.READY
    bad = measured({"quantity": NARROW}, at_most(-30, "dBm"), [-29, -29, -29], NOISE)
    assert bad.label is Label.FAILING


def test_a_density_unit_carries_its_bandwidth() -> None:
    plain = a_quantity("output_power")
    column = {"quantity": plain, "unit": "dBm/100 kHz", "spectrum": SpectrumKind.NOISE_LIKE}
    status = measured(column, at_most(-30, "dBm/MHz"), [-40, -40.1, -39.9], plain)
    assert (status.k, status.n_failing) == (2, 1)


def test_a_mask_states_its_bandwidth_segment_by_segment() -> None:
    emission = a_quantity("output_power")
    limit = parse_limit("mask(offset[MHz], max dBm: 0..<10: -30 in 1 MHz; 10..50: -30 in 100 kHz)")
    column = a_value_column(
        "P",
        quantity=emission.model_copy(update={"bandwidth_hz": 1e5}),
        unit="dBm",
        spectrum=SpectrumKind.NOISE_LIKE,
    )
    offsets = some_columns({"offset": "MHz"}, offset=[5, 20, 20], frequency=[27.5, 28.75, 30])
    status = status_of(
        a_requirement(quantity=emission, limit=limit),
        a_conditions_set("CS", a_dimension()),
        an_evidence_table(values=(column,)),
        T_1=some_evidence({"P": [-39.0, -31.0, -29.0]}, conditions=offsets),
    )
    points = status.activities[0].items["LNA-1"]
    assert points.value_high.tolist() == [-29.0, -31.0, -29.0]
    assert points.verdict.tolist() == [8, 4, 8]  # one reading keeps the mask, and does not sweep it


def test_a_table_that_fits_nothing_is_listed_with_the_reason() -> None:
    stray = an_evidence_table("T-9", values=(a_value_column("NF", quantity=a_quantity("noise_figure")),))
    results = results_of(stray, T_1=some_evidence(), T_9=some_evidence({"NF": [1, 1, 1]}))
    assert dict(results.unmatched) == {"T-9": "no requirement on LNA asks for noise_figure"}


def test_a_sheet_that_names_a_requirement_is_cross_checked() -> None:
    other = a_requirement("R-2", quantity=a_quantity("noise_figure"), limit=at_most(3))
    named = an_evidence_table(requirement="R-2")
    status = status_of(other, named, requirement="R-2", T_1=some_evidence())
    assert kinds(status) == ["requirement"]
    assert status_of(other, named, T_1=some_evidence()).k == 3
