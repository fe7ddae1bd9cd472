"""An invented receiver with everything that a cascade can give, for tests of how budgets are shown and written."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from specflow.changes import diff
from specflow.model.base import Document
from specflow.model.budget import Budget
from specflow.model.budget_line import BudgetLine, LineTolerance
from specflow.model.budget_outcome import BudgetOutcome
from specflow.model.project import Project
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import load_dictionary
from specflow.store import ProjectStore, create_project
from specflow.workflows.budget_outcome import HowToCompute, budget_outcome
from tests.budgets.chains import a_chain, project_of, unit_of
from tests.builders import (
    a_budget_line,
    a_conditions_set,
    a_dimension,
    a_project,
    a_quantity,
    a_requirement,
    at_least,
    at_most,
)

DICTIONARY = load_dictionary()
STAGES: tuple[dict[str, Any], ...] = (
    {"block": "ANT", "antenna_gain": 30.0, "antenna_noise_temperature": 60.0},
    {"block": "FIL", "insertion_loss": 1.0, "passive": True},
    {"block": "LNA", "gain": 20.0, "noise_figure": 1.5, "oip3": 20.0, "op1db": 8.0, "iip2": 30.0, "count": 4},
    {"block": "MIX", "conversion_loss": 7.0, "noise_temperature": 900.0, "iip3": 12.0, "ip1db": 3.0, "iip2": 40.0},
    {"block": "IF", "gain": 30.0, "noise_figure": 4.0, "oip3": 30.0, "op1db": 20.0, "iip2": 35.0, "snr": 6.0},
)  # fmt: skip
#: Further figures by position: interferers at the input, what rejects and mixes them, and DC power.
FURTHER: dict[int, dict[str, float]] = {
    1: {"blocking_level": -30.0, "receiver_intermodulation": -48.0, "noise_density": -128.0, "isolation": 62.0,
        "desensitisation": 1.0},
    2: {"rejection": 6.0},
    3: {"dc_power": 0.2},
    4: {"phase_noise": -150.0, "rejection": 3.0, "dc_power": 0.5},
    5: {"phase_noise": -158.0, "drain_efficiency": 18.0},
}  # fmt: skip
UNITS = {
    "gain": "dB",
    "noise_figure": "dB",
    "noise_temperature": "K",
    "system_noise_temperature": "K",
    "g_over_t": "dB/K",
    "noise_floor": "dBm",
    "noise_density": "dBm/Hz",
    "sensitivity": "dBm",
    "iip3": "dBm",
    "oip3": "dBm",
    "iip2": "dBm",
    "oip2": "dBm",
    "ip1db": "dBm",
    "op1db": "dBm",
    "output_power": "dBm",
    "eirp": "dBm",
    "output_backoff": "dB",
    "sfdr": "dB",
    "refsens": "dBm",
    "aclr": "dB",
    "dc_power": "W",
    "total_efficiency": "%",
    "pae": "%",
    "desensitisation": "dB",
    "blocking_level": "dBm",
}
NEEDS_FURTHER = ("dc_power", "total_efficiency", "pae", "desensitisation", "blocking_level")
SMALL = ("noise_figure", "g_over_t")
AIR = a_conditions_set(
    "CS-AIR", a_dimension("frequency", values=(17.7, 20.2)), a_dimension("temperature_ambient", "°C", values=(-25, 55))
)  # fmt: skip


def tolerances(budget: Budget, amount: float = 0.3, **fields: Any) -> Budget:
    """Return the budget with a tolerance on each of its lines: limits, uniform, unless said."""
    said = {"meaning": "limits", "distribution": "uniform"} | fields
    tolerance = LineTolerance(minus=amount, plus=amount, **said)
    lines = tuple(
        line if line.parameter == "snr" else line.model_copy(update={"tolerance": tolerance}) for line in budget.lines
    )  # fmt: skip
    return budget.model_copy(update={"lines": lines})


def requirements(*names: str) -> list[Requirement]:
    """Return one requirement a quantity: noise figure at most 4 dB, the others at most or at least something far."""
    limits = {"noise_figure": at_most(4), "g_over_t": at_least(3, "dB/K")}
    return [
        a_requirement(
            f"R-{name}",
            block="SYS",
            quantity=a_quantity(name),
            limit=limits.get(name) or at_most(10_000, UNITS[name]),
            conditions="CS-AIR",
        )
        for name in names
    ]


def a_receiver(*names: str, **fields: Any) -> Budget:
    """Return the budget B-RX over two frequencies and two temperatures, serving requirements on these quantities."""
    served = names or SMALL
    more = {
        "id": "B-RX",
        "title": "Receiver",
        "requirements": tuple(f"R-{name}" for name in served),
        "bandwidth_hz": 1e6,
        "channel_spacing_hz": 1.25e6,
        "input_level": -60.0,
        "conditions": "CS-AIR",
    }
    made = tolerances(a_chain(*STAGES, parameter=served[0], **more | fields))
    return with_further(made) if set(served) & set(NEEDS_FURTHER) else made


def with_further(budget: Budget) -> Budget:
    """Return the receiver with interferers, what rejects and mixes them, and DC power."""
    blocks = {position.order: position.block for position in budget.positions}
    lines = [
        a_budget_line(order, blocks[order], name, value, unit=unit_of(name))
        for order, figures in FURTHER.items()
        for name, value in figures.items()
    ]
    return budget.model_copy(update={"lines": (*budget.lines, *lines)})


def receiver_project(
    budget: Budget | None = None, *documents: Document, names: tuple[str, ...] = SMALL
) -> Snapshot:
    """Return the project of a receiver budget."""
    return project_of(budget or a_receiver(*names), AIR, *documents, requirements=requirements(*names))


def outcome(
    budget: Budget | None = None, how: HowToCompute | None = None, names: tuple[str, ...] = SMALL
) -> BudgetOutcome:
    """Return what the receiver budget comes to."""
    budget = budget or a_receiver(*names)
    return budget_outcome(budget, receiver_project(budget, names=names), DICTIONARY, how)


def receiver_store(path: Path, snapshot: Snapshot | None = None) -> ProjectStore:
    """Make a store of the receiver project."""
    store = create_project(path, a_project())
    known = snapshot or receiver_project()
    documents = [one for group in known.documents.values() for one in group.values()]
    store.apply(diff(store.load(), [one for one in documents if not isinstance(one, Project)]), by="tester")
    return store


def with_image(budget: Budget) -> Budget:
    """Return the receiver with a double-sideband mixer, a filter that rejects its image, and a second conversion."""
    double = {"parameter": "noise_figure", "value": 6.0, "unit": "dB", "sideband": "DSB"}
    single = {"value": 9.0, "sideband": "SSB"}
    changed = {("MIX", "noise_temperature"): double, ("IF", "noise_figure"): single}
    lines = [
        BudgetLine.model_validate(line.model_dump() | changed.get((line.block, line.parameter), {}))
        for line in budget.lines
    ]
    for position, block, rejection in ((2, "FIL", 12.0), (4, "MIX", 5.0), (5, "IF", 8.0)):
        lines.append(
            BudgetLine.model_validate(
                {
                    "position": position,
                    "block": block,
                    "parameter": "image_rejection",
                    "value": rejection,
                    "unit": "dB",
                }
            )
        )
    return budget.model_copy(update={"lines": tuple(lines)})
