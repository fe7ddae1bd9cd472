"""Columns of azimuth and elevation, or of u and v, turned into θ and φ where somebody says in which frame they are.

Both stay: what was recorded, and what was computed of it, which names its formula. Nothing is turned unasked.
"""

from __future__ import annotations

import re

import numpy as np

from specflow.conditions.frames import FRAMES, frame_of, theta_phi
from specflow.errors import ConditionsError
from specflow.importers.measured.conditions import ReadConditions
from specflow.importers.measured.work import TableWork
from specflow.model.columns import Columns
from specflow.model.evidence import ConditionColumn
from specflow.units import converter, parse_unit


def add_directions(work: TableWork, conditions: ReadConditions) -> None:
    """Add θ and φ to the conditions of a table, by the frame that is stated; what cannot be turned is asked."""
    said = work.stated.said.get("directions")
    if said is None:
        return
    found = frame_of(said.text)
    if found is None:
        remedy = f'one of: {", ".join(FRAMES)}; with ", azimuth reversed" or ", elevation reversed" behind it'
        work.ask("directions", "", f"{said.text!r} is no frame that is known ({said.by})", remedy)
        return
    name, *signs = found
    frame, columns = FRAMES[name], conditions.columns
    missing = [one for one in (frame.first, frame.second) if one not in columns.numeric]
    if missing or {"theta", "phi"} & set(columns.names):
        what = f"no column of {' and '.join(missing)}" if missing else "the table has θ and φ of its own"
        work.ask(
            "directions",
            "",
            f"directions in {said.text}, but {what}",
            "leave the frame out, or name the columns",
        )
        return
    angles = [
        _degrees(columns, one) * sign for one, sign in zip((frame.first, frame.second), signs, strict=True)
    ]
    try:
        theta, phi = theta_phi(name, *angles)
    except ConditionsError as error:
        work.ask("directions", "", error.message, error.hint)
        return
    how = f"computed from {frame.first} and {frame.second}, {said.text} ({said.by}): {frame.words}"
    added = {"theta": theta, "phi": np.where(np.isnan(theta), np.nan, phi)}
    conditions.columns = Columns(
        columns.size,
        {**columns.numeric, **added},
        columns.text,
        {**columns.units, "theta": "deg", "phi": "deg"},
    )
    conditions.documents += [
        ConditionColumn(dimension=one, kind="numeric", unit="deg", stated_by=how) for one in added
    ]
    work.notes.append(f"θ and φ were {how}; common practice, no source")


def _degrees(columns: Columns, name: str) -> np.ndarray[tuple[int, ...], np.dtype[np.float64]]:
    unit = columns.units.get(name, "")
    if name.startswith("direction_") or unit in ("deg", ""):
        return columns.numeric[name]
    return np.asarray(converter(parse_unit(unit), parse_unit("deg"))(columns.numeric[name]), np.float64)


def cosine_of(header: str, headers: list[str]) -> str:
    """The dimension of a column headed "u" or "v" in a table that has both; "" for any other."""
    own = re.sub(r"[\s_]+", "", header.casefold())
    if own not in ("u", "v"):
        return ""
    plain = {re.sub(r"[\s_]+", "", one.casefold()) for one in headers}
    return f"direction_{own}" if {"u", "v"} <= plain else ""
