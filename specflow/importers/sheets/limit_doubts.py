"""Limits that read well but are probably not meant: the sign of the other convention, a table nobody must fill."""

from __future__ import annotations

from specflow.conditions import find_dimension
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.limits.expression_shape import plain_number
from specflow.limits.tree import varying_names, walk_limit
from specflow.model.conditions import ConditionsSet
from specflow.model.declared import DeclaredValue
from specflow.model.limit import Between, Bound, Limit
from specflow.model.parameter import Parameter

#: Ratios that the dictionary describes as positive, and as negative, in dB; sheets often have them the other way round.
POSITIVE = frozenset(
    {
        "aclr",
        "carrier_rejection",
        "conversion_loss",
        "cross_polarisation",
        "emission_attenuation",
        "image_rejection",
        "insertion_loss",
        "isolation",
        "null_depth",
        "rejection",
        "return_loss",
        "reverse_isolation",
        "scan_loss",
        "side_lobe_suppression",
    }
)
NEGATIVE = frozenset(
    {
        "acpr_relative",
        "carrier_leakage",
        "cross_polar_level",
        "grating_lobe_level",
        "harmonics",
        "image_level",
        "imd2",
        "imd3",
        "side_lobe_level",
        "spurious_relative",
    }
)


def note_doubts(
    row: SheetRow,
    intake: Intake,
    column: str,
    limit: Limit,
    parameter: Parameter | None,
    conditions: str | None,
) -> None:
    """Report what is doubtful about a limit that was read; nothing is changed."""
    if parameter is not None:
        _note_sign(row, intake, column, limit, parameter)
    _note_variation(row, intake, column, limit, conditions)


def _note_sign(row: SheetRow, intake: Intake, column: str, limit: Limit, parameter: Parameter) -> None:
    expected = 1 if parameter.key in POSITIVE else -1 if parameter.key in NEGATIVE else 0
    numbers = [number for number in _numbers(limit) if number]
    if not expected or not numbers or any(number * expected > 0 for number in numbers):
        return
    sign = "positive" if expected > 0 else "negative"
    intake.note(
        row,
        column,
        f"the limit is {limit.text!r}, but {parameter.title} ({parameter.key}) is {sign} here",
        "turn sign and side round (-15 dB max is 15 dB min), or name the parameter of the other sign",
        rule="workbook-sign",
        why=parameter.description,
    )


def _numbers(limit: Limit) -> list[float]:
    """The plain numbers that bound the requirement's own quantity."""
    values = []
    for node in walk_limit(limit.tree):
        match node:
            case Bound(value=value):
                values.append(plain_number(value))
            case Between(lower=lower, upper=upper):
                values += [plain_number(lower), plain_number(upper)]
    return [value for value in values if value is not None]


def _note_variation(row: SheetRow, intake: Intake, column: str, limit: Limit, conditions: str | None) -> None:
    known = intake.find(ConditionsSet, conditions)
    if conditions is not None and known is None:
        return
    required = {dimension.name for dimension in known.dimensions} if known else set()
    declared = {value.name for value in intake.all(DeclaredValue)}
    for name in sorted(varying_names(limit.tree) - declared):
        dimension = find_dimension(name)
        if dimension is None or {dimension.name, name} & required:
            continue
        asked = f"the conditions set {known.id} asks for no" if known else "no conditions set asks for"
        intake.note(
            row,
            column,
            f"the limit differs by {name}, but {asked} values of it; evidence at one of them counts for all",
            f"name a conditions set that has {dimension.name} with the values of the limit",
            rule="workbook-limit-varies",
        )
