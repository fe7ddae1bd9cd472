"""A small invented project that has something of everything: what tests of reports and front ends look at.

A terminal (system) of a PA, an LNA and an array. Proved, failing, marginal, missing and doubtful points; two items; a
limit that differs from point to point; a requirement without conditions; one that is to be determined.
"""

from __future__ import annotations

from datetime import date
from pathlib import Path

from specflow.conditions import make_conditions_set, parse_dimension
from specflow.limits import parse_limit
from specflow.model.base import Document
from specflow.model.block import Tier
from specflow.model.evidence import ConditionColumn, EvidenceColumns
from specflow.model.origin import Origin
from specflow.model.requirement import DecisionRule, Provers, Requirement, RuleName, Source
from specflow.model.snapshot import Results, Snapshot
from specflow.parameters import load_dictionary
from specflow.store import ProjectStore, create_project
from specflow.verification import evaluate
from tests.builders import (
    a_block,
    a_project,
    a_quantity,
    a_snapshot,
    a_value_column,
    adding,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    an_item,
    some_columns,
    some_evidence,
)
from tests.conftest import noon

AS_OF = date(2026, 6, 1)
DICTIONARY = load_dictionary()
WORKBOOK = Origin(file="harbour-requirements.xlsx", sha256="a1" * 32, sheet="Requirements", row=5, column=1)
PA_FILE = an_evidence_file("F-PA", name="pa_bench.xlsx", sha256="b2" * 32, size=20480)
LNA_FILE = an_evidence_file("F-LNA", name="=lna.csv", sha256="c3" * 32, size=512)

TWO_BANDS = "cases(when frequency < 19 GHz: <= 30 dB; otherwise: <= 28 dB)"
CORNERS = tuple((frequency, ambient) for frequency in (27.5, 28.75, 30.0) for ambient in (-40.0, 25.0, 85.0))


def requirement(id: str, title: str, limit: str, parameter: str, block: str, **fields: object) -> Requirement:
    """Return a requirement with its limit as an engineer types it."""
    known = DICTIONARY.get(parameter)
    assert known is not None
    return Requirement.model_validate(
        {
            "id": id,
            "title": title,
            "tier": Tier.BLOCK,
            "block": block,
            "quantity": a_quantity(parameter),
            "limit": parse_limit(limit, parameter=known),
            "conditions": "TX",
            "source": Source(document="Invented spec", issue="B", paragraph="4.2"),
            "owner": "transmit lead",
            "origin": WORKBOOK,
        }
        | fields
    )


def documents() -> list[Document]:
    """Return all documents of the project."""
    corners = make_conditions_set(
        "TX",
        [
            parse_dimension("frequency: 27.5, 28.75, 30 GHz ± 10 MHz"),
            parse_dimension("temperature_ambient: -40, 25, 85 °C ± 2 K"),
        ],
    )
    sweep = make_conditions_set("RX", [parse_dimension("frequency: 17.7 to 20.2 GHz step 0.5 GHz")])
    channels = make_conditions_set("RX4", [parse_dimension("frequency: 17.7, 18.2, 19.7, 20.2 GHz ± 10 MHz")])
    guarded = DecisionRule(name=RuleName.GUARDED)
    requirements = [
        requirement("SYS-1", "Radiated power", ">= 45 dBm", "eirp", "TERM", tier=Tier.SYSTEM),
        requirement(
            "SYS-2", "Receive figure", ">= 9 dB/K TBR", "g_over_t", "TERM", tier=Tier.SYSTEM, conditions="RX"
        ),
        requirement(
            "PA-1",
            "Output power of the PA",
            ">= 30 dBm",
            "output_power",
            "PA",
            parents=("SYS-1",),
            decision_rule=guarded,
        ),
        requirement(
            "PA-2",
            "Gain of the PA at each item",
            ">= 20 dB",
            "gain",
            "PA",
            parents=("SYS-1",),
            provers=Provers(rule="each of", items=("PA-A", "PA-B")),
        ),
        requirement(
            "PA-3", "Current drawn", "<= 1.2 A", "supply_current", "PA", parents=("SYS-1",), conditions=None
        ),
        requirement("PA-4", "Harmonics", "TBD dBc", "harmonics", "PA", parents=("SYS-1",)),
        requirement(
            "LNA-1",
            "Noise of the LNA",
            "<= 1.5 dB",
            "noise_figure",
            "LNA",
            parents=("SYS-2",),
            conditions="RX",
        ),
        requirement(
            "LNA-2",
            "Gain of the LNA, less at high frequency",
            TWO_BANDS,
            "gain",
            "LNA",
            parents=("SYS-2",),
            conditions="RX4",
        ),
    ]
    return [
        a_block("TERM", name="Terminal", tier=Tier.SYSTEM),
        a_block("PA", name="Power amplifier", parent="TERM", quantity=4),
        a_block("LNA", name="Low-noise amplifier", parent="TERM"),
        an_item("PA-A", block="PA", serial="0001"),
        an_item("PA-B", block="PA", serial="0002"),
        an_item("LNA-A", block="LNA", serial="0011"),
        corners,
        sweep,
        channels,
        *requirements,
        *(an_activity(one.id, tier=one.tier) for one in requirements if one.id != "SYS-2"),
        PA_FILE,
        LNA_FILE,
        an_evidence_table(
            "T-PA",
            file="F-PA",
            sheet="Bench 1",
            block="PA",
            rows=16,
            values=(
                a_value_column(
                    "Pout", quantity=a_quantity("output_power"), unit="W", unit_from="units row", column=4
                ),
                a_value_column("Gain", quantity=a_quantity("gain"), unit="dB", column=6),
            ),
            conditions=(
                ConditionColumn(dimension="frequency", kind="numeric", unit="GHz", column=2),
                ConditionColumn(dimension="temperature_ambient", kind="numeric", unit="°C", column=3),
            ),
            performer="bench 1",
        ),
        an_evidence_table(
            "T-LNA",
            file="F-LNA",
            sheet="",
            block="LNA",
            rows=4,
            values=(
                a_value_column("NF", quantity=a_quantity("noise_figure"), column=2),
                a_value_column("G", quantity=a_quantity("gain"), column=3),
            ),
        ),
    ]


def columns() -> dict[str, EvidenceColumns]:
    """Return the arrays of its tables: PA-A at eight corners (cold ends at the wrong temperature), PA-B at eight."""
    a = [corner for corner in CORNERS if corner != (30.0, -40.0)]
    b = [corner for corner in CORNERS if corner != (28.75, 25.0)]
    power = [1.2, 1.15, 1.02, 1.3, 1.25, 1.1, 1.2, 0.95] + [1.4] * 8
    gain = [22.0, 21.5, 20.5, 22.0, 21.5, 20.5, 22.0, 21.0] + [21.0] * 8
    conditions = some_columns(frequency=[x for x, _ in a + b], temperature_ambient=[t for _, t in a + b])
    pa = some_evidence(
        {"Pout": power, "Gain": gain}, items=["PA-A"] * 8 + ["0002"] * 8, conditions=conditions, u=0.1
    )
    lna = some_evidence(
        {"NF": [1.1, 1.2, 1.3, 1.4], "G": [27.0, 27.0, 27.5, 27.9]},
        items="LNA-A",
        conditions=some_columns(frequency=[17.7, 18.2, 19.7, 20.2]),
    )
    return {"T-PA": pa, "T-LNA": lna}


def snapshot() -> Snapshot:
    """Return the project in memory."""
    return a_snapshot(a_project(name="Harbour terminal"), *documents(), columns=columns())


def results(of: Snapshot) -> Results:
    """Return what is computed from it as of the date of the tests."""
    return evaluate(of, DICTIONARY, as_of=AS_OF)


def make_store(path: Path) -> ProjectStore:
    """Create the project in a file and return it, open."""
    store = create_project(path, a_project(name="Harbour terminal"), clock=noon)
    store.apply(adding(*documents()), columns=columns(), by="array lead", reason="first issue")
    return store
