"""A small invented receiver as a project: a chain with limits on noise, distortion and gain over temperature."""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

from specflow.model.base import Document
from specflow.model.block import Tier
from specflow.model.budget import Budget
from specflow.model.requirement import Requirement
from specflow.store import ProjectStore, create_project
from tests.budgets.chains import a_chain
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_project,
    a_quantity,
    a_requirement,
    adding,
    at_least,
    at_most,
)

CLOCK: Callable[[], datetime] = lambda: datetime(2026, 5, 1, tzinfo=UTC)  # noqa: E731


def within(amount: float) -> dict[str, object]:
    """Return the tolerance ± amount, as limits of a uniform distribution."""
    return {"minus": amount, "plus": amount, "meaning": "limits", "distribution": "uniform"}


def a_receiver(id: str = "RX", **fields: object) -> Budget:
    """Return the chain: LNA, filter, mixer, IF amplifier; gains within half a decibel."""
    window = {"gain": {"tolerance": within(0.5)}}
    return a_chain(
        {"block": "LNA", "gain": 18.0, "noise_figure": 1.2, "iip3": 0.0, "more": window},
        {
            "block": "FIL",
            "insertion_loss": 2.0,
            "iip3": 40.0,
            "passive": True,
            "more": {"insertion_loss": {"tolerance": within(0.3)}, "iip3": {"tolerance": within(1.0)}},
        },
        {"block": "MIX", "gain": -7.0, "noise_figure": 7.0, "iip3": 14.0, "more": window},
        {"block": "IF", "gain": 20.0, "noise_figure": 4.0, "iip3": 10.0, "more": window},
        **{"id": id, "requirements": ("SYS-NF", "SYS-IP"), "conditions": "HOT-COLD"} | fields,
    )


def limits_of_receiver() -> tuple[Requirement, Requirement]:
    """Return the two limits that the chain serves."""
    common = {"block": "SYS", "tier": Tier.SYSTEM, "conditions": "HOT-COLD"}
    noise = a_requirement("SYS-NF", quantity=a_quantity("noise_figure"), limit=at_most(3.0), **common)
    intercept = a_requirement("SYS-IP", quantity=a_quantity("iip3"), limit=at_least(-8, "dBm"), **common)
    return noise, intercept


def documents() -> list[Document]:
    """Return the whole project but the project document."""
    blocks = [a_block(name, parent="SYS") for name in ("LNA", "FIL", "MIX", "IF")]
    temperatures = a_dimension("temperature_ambient", "°C", values=(-30.0, 20.0, 55.0), tolerance=2.0)
    return [
        a_block("SYS", tier=Tier.SYSTEM),
        *blocks,
        a_conditions_set("HOT-COLD", temperatures),
        *limits_of_receiver(),
        a_receiver(),
    ]


def make_store(path: Path, *more: Document) -> ProjectStore:
    """Create the project in a file."""
    store = create_project(path, a_project(), clock=CLOCK)
    store.apply(adding(*documents(), *more), by="A. Invented")
    return store
