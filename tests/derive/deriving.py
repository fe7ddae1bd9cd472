"""Building what a law is handed, and stored tables to derive from. All data here is invented."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from specflow.derive import (
    LAW_BY_NAME,
    Outcome,
    Readings,
    Request,
    Role,
    Samples,
    complete_settings,
    derive_table,
)
from specflow.derive.request import Derived
from specflow.derive.said import typed_settings
from specflow.derive.samples import Range
from specflow.model.columns import TextColumn
from specflow.model.evidence import ConditionColumn, EvidenceColumns, EvidenceTable, ValueArrays
from specflow.model.parameter import Better, Parameter
from specflow.parameters import load_dictionary
from tests.builders import a_quantity, a_value_column, an_evidence_table, some_columns

UNITS = {
    "theta": "deg",
    "phi": "deg",
    "azimuth": "deg",
    "elevation": "deg",
    "offset": "Hz",
    "input_level": "dBm",
}


def law_on(
    name: str,
    along: Sequence[float] | None = None,
    values: Mapping[str, Any] | Sequence[float] = (),
    *,
    unit: str | Mapping[str, str] = "dB",
    axis: str = "frequency",
    axis_unit: str = "GHz",
    u: Sequence[float] | None = None,
    directions: tuple[Any, Any] | None = None,
    better: Better = Better.HIGHER,
    span: tuple[float, float] | None = None,
    **settings: str,
) -> Outcome:
    """Apply the function of a law to arrays: ``values`` of its role, or by role; settings with _ for blanks."""
    law = LAW_BY_NAME[name]
    by_role = values if isinstance(values, Mapping) else {law.roles[0]: values}
    units = {role: unit if isinstance(unit, str) else unit[role] for role in by_role}
    readings = {}
    for role, column in by_role.items():
        low = np.asarray(column, np.float64)
        readings[role] = Readings(low, low, units[role], None if u is None else np.asarray(u, np.float64))
    texts = complete_settings(law, {key.replace("_", " "): text for key, text in settings.items()})
    typed = typed_settings(law, texts, axis_unit=axis_unit, value_unit=units[law.roles[0]])
    parameter = Parameter(key="gain", title="Gain", group="gain", unit="dB", better=better)
    if directions is not None:
        axes = {"theta": np.asarray(directions[0], float), "phi": np.asarray(directions[1], float)}
        samples = Samples(readings, axes, {"theta": "deg", "phi": "deg"}, "", None, typed, parameter)
    elif along is None:
        samples = Samples(readings, settings=typed, gives=parameter)
    else:
        place = np.asarray(along, np.float64)
        low, high = span or (float(place[0]), float(place[-1]))
        samples = Samples(
            readings, {axis: place}, {axis: axis_unit}, axis, Range(low, high), typed, parameter
        )
    return law.function(samples)


def value_of(name: str, *args: Any, **fields: Any) -> float:
    """Apply the function of a law that gives one number."""
    (value,) = law_on(name, *args, **fields).value
    return float(value)


def a_trace(
    id: str = "T-1",
    values: Mapping[str, Sequence[float]] | None = None,
    *,
    u: Sequence[float] | None = None,
    high: Sequence[float] | None = None,
    items: Sequence[str] | str = "LNA-1",
    quantities: Mapping[str, Mapping[str, Any]] | None = None,
    units: Mapping[str, str] | None = None,
    **conditions: Sequence[Any],
) -> tuple[EvidenceTable, EvidenceColumns]:
    """Return a stored table: gain over frequency unless other value columns and conditions are given."""
    named = values or {"Gain": [21.0, 22.0, 23.0]}
    size = len(next(iter(named.values())))
    columns = some_columns(UNITS, **(conditions or {"frequency": [17.7, 19.0, 20.2]}))
    arrays = {}
    for name, column in named.items():
        low = np.asarray(column, np.float64)
        top = low if high is None else np.asarray(high, np.float64)
        arrays[name] = ValueArrays(low, top, None if u is None else np.asarray(u, np.float64))
    names = [items] * size if isinstance(items, str) else list(items)
    evidence = EvidenceColumns(columns, arrays, np.arange(2, size + 2, dtype=np.int32), TextColumn.of(names))
    told = [
        a_value_column(
            name,
            column=3 + place,
            unit=(units or {}).get(name, "dB"),
            quantity=a_quantity(**dict((quantities or {}).get(name, {"parameter": "gain"}))),
        )
        for place, name in enumerate(named)
    ]
    document = an_evidence_table(
        id,
        rows=size,
        digest=f"digest of {id}",
        values=tuple(told),
        conditions=tuple(
            ConditionColumn(
                dimension=name,
                kind="numeric" if name in columns.numeric else "text",
                unit=columns.units.get(name, ""),
                column=1,
            )
            for name in columns.names
        ),
    )
    return document, evidence


def derived_of(
    law: str,
    *tables: tuple[EvidenceTable, EvidenceColumns],
    over: str = "",
    where: Sequence[str] = (),
    roles: Mapping[str, str] | None = None,
    gives: str = "gain",
    **settings: str,
) -> Derived:
    """Apply a law to stored tables; ``roles``: "column" or "column where polarisation: H" by role."""
    entry = LAW_BY_NAME[law]
    chosen = []
    for name in entry.roles:
        text = (roles or {}).get(name, "")
        column, _, clause = text.partition(" where ")
        document, arrays = next(
            (one for one in tables if column in one[1].values), tables[min(len(chosen), len(tables) - 1)]
        )
        column = column or document.values[0].name
        chosen.append(Role(name, document, arrays, column, (clause,) if clause else ()))
    parameter = load_dictionary().get(gives)
    assert parameter is not None
    said = {key.replace("_", " "): text for key, text in settings.items()}
    request = Request(
        entry, tuple(chosen), complete_settings(entry, said), parameter, (over,) if over else (), tuple(where)
    )
    return derive_table(request)
