"""The product tree: blocks (types), their planes, and items (the specimens)."""

from __future__ import annotations

from enum import StrEnum

from pydantic import Field

from specflow.model.base import Code, Document
from specflow.model.origin import Origin


class Tier(StrEnum):
    """Level of assembly; called tier because a level is in dB."""

    SYSTEM = "system"
    ASSEMBLY = "assembly"
    BLOCK = "block"


class Maturity(StrEnum):
    """How well the figures of a block are known, from least to best."""

    ESTIMATED = "estimated"
    DATASHEET_TYPICAL = "datasheet typical"
    DATASHEET_LIMIT = "datasheet limit"
    SIMULATED = "simulated"
    BREADBOARD = "breadboard measured"
    ENGINEERING = "engineering unit"
    QUALIFICATION = "qualification unit"
    PRODUCTION = "production unit"


class Plane(Document):
    """A named port of a block where a quantity is referred to; ``convention`` for EIRP, TRP, EIS and the like."""

    name: str
    convention: str = ""


class PlanePath(Document):
    """A declared way from one plane to another, without which values do not move between planes."""

    start: str
    end: str
    gain_db: float
    standard_uncertainty_db: float = Field(ge=0)
    note: str = ""


class Block(Document):
    """A node of the product tree (a type); the root is the system. ``quantity`` of it are used in its parent."""

    id: Code
    name: str
    tier: Tier
    parent: Code | None = None
    kind: str = ""
    quantity: int = Field(default=1, ge=1)
    order: int = 0
    planes: tuple[Plane, ...] = ()
    paths: tuple[PlanePath, ...] = ()
    owner: str = ""
    maturity: Maturity = Maturity.ESTIMATED
    part_number: str = ""
    supplier: str = ""
    note: str = ""
    revision: int = 1
    origin: Origin | None = None


class HardwareType(StrEnum):
    """How representative a specimen is, from least to most."""

    BREADBOARD = "breadboard"
    ENGINEERING = "engineering"
    QUALIFICATION = "qualification"
    PRODUCTION = "production"


class Item(Document):
    """One physical specimen of a block."""

    id: Code
    block: Code
    serial: str
    hardware_type: HardwareType = HardwareType.ENGINEERING
    hardware_revision: str = ""
    firmware: str = ""
    calibration: str = ""
    built_into: Code | None = None
    note: str = ""
    revision: int = 1
    origin: Origin | None = None
