"""What a proposed requirement is on: the parameter, and the plane and statistic where they are known, never guessed."""

from __future__ import annotations

from specflow.budgets.allotment import BlockParameter, key_of
from specflow.budgets.probe import Probe
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.budget_line import BudgetLine, Trace
from specflow.model.evidence import EvidenceTable
from specflow.model.parameter import QuantityIdentity
from specflow.model.snapshot import Snapshot

_AT_INPUT = ("noise_figure", "noise_temperature", "iip3", "iip2", "ip1db")
_AT_OUTPUT = ("oip3", "oip2", "op1db", "output_power")


def quantity_of(key: BlockParameter, probe: Probe, block: Block) -> QuantityIdentity:
    """Return the quantity of a block's share.

    Plane and statistic are those that its lines state, or the recorded table that a line reads; else a figure that
    belongs to one port has the block's plane of that name, "input" or "output", where it has one. A mixer's noise
    figure has the sideband convention for its plane: a double-sideband reading must not prove a single-sideband limit.
    """
    lines = [read.line for read in probe.chain.lines if key_of(read) == key]
    plane = _one(
        [found for line in lines for found in (line.plane, _recorded(line, probe.snapshot, "plane"))]
    )
    statistic = _one(
        [found for line in lines for found in (line.statistic, _recorded(line, probe.snapshot, "statistic"))]
    )
    return QuantityIdentity(
        parameter=lines[0].parameter,
        plane=plane or _sideband(key, probe) or _port(lines[0], block),
        statistic=statistic,
    )


def sideband_words(key: BlockParameter, probe: Probe) -> str:
    """Say the sideband of a mixer's noise figure for a title; "" where its lines state none."""
    return {"DSB": " (double sideband)", "SSB": " (single sideband)"}.get(_sideband(key, probe), "")


def _sideband(key: BlockParameter, probe: Probe) -> str:
    stated = {read.line.sideband for read in probe.chain.lines if key_of(read) == key}
    if stated & {"DSB", "both"}:
        return "DSB"
    return "SSB" if "SSB" in stated else ""


def _one(stated: list[str]) -> str:
    """Return what is stated, "" where several lines of a block state different things."""
    named = {code_key(name): name for name in stated if name}
    return next(iter(named.values())) if len(named) == 1 else ""


def _recorded(line: BudgetLine, snapshot: Snapshot, part: str) -> str:
    if not isinstance(line.value, Trace):
        return ""
    table = snapshot.find(EvidenceTable, line.value.table)
    columns = table.values if table is not None else ()
    found = next((one for one in columns if code_key(one.name) == code_key(line.value.column)), None)
    return str(getattr(found.quantity, part)) if found is not None else ""


def _port(line: BudgetLine, block: Block) -> str:
    name = code_key(line.parameter)
    port = "input" if name in _AT_INPUT else "output" if name in _AT_OUTPUT else ""
    return next((one.name for one in block.planes if port and code_key(one.name) == port), "")
