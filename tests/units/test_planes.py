"""What is missing between planes."""

from __future__ import annotations

import pytest

from specflow.units import missing_between_planes


@pytest.mark.parametrize(
    ("source", "target", "says"),
    [
        ("EIRP", "TRP", "directivity"),
        ("EIS", "TIS", "directivity"),
        ("e.i.r.p.", "conducted", "antenna gain"),
        ("TRP", "conducted", "efficiency"),
        ("EIRP", "ERP", "2.15 dB"),
        ("antenna face", "LNA input", "a path from antenna face to LNA input"),
    ],
)
def test_the_missing_piece_is_named_in_both_directions(source: str, target: str, says: str) -> None:
    assert says in missing_between_planes(source, target)
    assert missing_between_planes(target, source)


def test_nothing_is_missing_within_one_plane() -> None:
    assert missing_between_planes("EIRP", "e.i.r.p.") == ""
