"""Cells of a requirement that say how it is judged: decision rule, provers, test tolerance."""

from __future__ import annotations

import re
from typing import get_args

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.items import known_items
from specflow.importers.sheets.row import SheetRow
from specflow.limits import alternatives
from specflow.model.expression import Number
from specflow.model.limit import Limit, TestTolerance
from specflow.model.parameter import Parameter
from specflow.model.requirement import DecisionRule, Provers, Requirement, RuleName
from specflow.units import Unit, convert, parse_quantity, parse_unit, split_quantity, tolerance_unit

_RULE = re.compile(
    r"^(?P<name>simple|guarded|four[- ]?way)\s*(?:w\s*=)?\s*(?P<factor>[0-9]+(?:\.[0-9]+)?)?\s*(?:[·*x]\s*)?U?$",
    re.IGNORECASE,
)
_GREATEST = re.compile(r"^(?:U\s*<?=?\s*)?(?P<amount>.+?)\s*(?:[,;(]?\s*k\s*=\s*(?P<k>[0-9.]+)\s*\)?)?$")
_PROVERS = re.compile(
    r"^(?P<rule>any one|each of|number of)\s*:?\s*(?P<rest>.*?)\s*(?P<together>[,(]?\s*together\)?)?$",
    re.IGNORECASE | re.DOTALL,
)
_STIMULUS = re.compile(r"\s*(?:on|to|of)?\s*(?:the\s+)?stimulus$", re.IGNORECASE)
TIGHTENS = "tightens the limit"
REFUSED = "not admissible"
COMPARISONS: tuple[str, ...] = get_args(DecisionRule.model_fields["comparison"].annotation)


def decision_rule(
    row: SheetRow, intake: Intake, limit: Limit | None, parameter: Parameter | None
) -> DecisionRule:
    """Read "simple", "guarded 1.0 U" or "four-way 1.0 U", and the greatest uncertainty that is admissible."""
    text = row.text("decision_rule")
    parts = _RULE.match(text) if text else None
    if text and parts is None:
        row.fault(
            "decision_rule", f"{text!r} is no decision rule", "write simple, guarded 1.0 U or four-way 1.0 U"
        )
    name = RuleName.SIMPLE if parts is None else _rule_name(parts["name"])
    factor = float(parts["factor"] or 1.0) if parts else 1.0
    excess = row.one_of("excess_uncertainty", (REFUSED, TIGHTENS), REFUSED)
    rounded = row.one_of("comparison", COMPARISONS, "absolute") == "rounded"
    return DecisionRule(
        name=name,
        guard_factor=factor,
        greatest_uncertainty=_greatest_uncertainty(row, intake, limit, parameter),
        excess_tightens=excess == TIGHTENS,
        comparison="rounded" if rounded else "absolute",
        conditional_pass_counts=row.yes("conditional_pass_counts", True),
    )


def _rule_name(word: str) -> RuleName:
    return RuleName.FOUR_WAY if word.casefold().startswith("four") else RuleName(word.casefold())


def _greatest_uncertainty(
    row: SheetRow, intake: Intake, limit: Limit | None, parameter: Parameter | None
) -> float | None:
    """U at k = 2 in the tolerance unit of the limit; another k is brought to 2."""
    text = row.text("greatest_uncertainty")
    parts = _GREATEST.match(text)
    wanted = None if parameter is None else _unit_of_uncertainty(limit, parameter)
    if not text or parts is None or parameter is None:
        _check_kept(row, intake, wanted)
        return None
    if wanted is None:
        row.fault(
            "greatest_uncertainty",
            f"the limit {limit.text if limit else ''!r} is in several units, so an uncertainty of {text} cannot be "
            "held against all of it",
            "write one requirement for each of the alternatives, each with its greatest uncertainty",
        )
        return None
    quantity = row.attempt("greatest_uncertainty", lambda: parse_quantity(parts["amount"]))
    if quantity is None:
        return None
    value = row.attempt(
        "greatest_uncertainty",
        lambda: convert(
            float(quantity.value), quantity.unit, wanted, log_factor=parameter.log_factor, difference=True
        ),
    )
    factor = float(parts["k"] or 2)
    if value is not None and not (float(value) > 0 and factor > 0):
        row.fault(
            "greatest_uncertainty", f"an uncertainty of {text} cannot be", "write an amount greater than 0"
        )
        return None
    return None if value is None else float(value) * 2 / factor


def _unit_of_uncertainty(limit: Limit | None, parameter: Parameter | None) -> Unit | None:
    """The unit in which readings are compared with the limit: of what is added to it; None where there are several."""
    own = (
        []
        if limit is None
        else [limit.unit]
        if limit.unit
        else [one.limit.unit for one in alternatives(limit)]
    )
    units = [unit for unit in own if unit] or ([parameter.unit] if parameter is not None else [])
    found = {tolerance_unit(parse_unit(unit)) for unit in units}
    return found.pop() if len(found) == 1 else None


def _check_kept(row: SheetRow, intake: Intake, wanted: Unit | None) -> None:
    """Refuse to keep the uncertainty that the project has under a limit that is now in another unit."""
    known = intake.snapshot.find(Requirement, row.subject) if row.subject else None
    if known is None or known.decision_rule.greatest_uncertainty is None or row.has("greatest_uncertainty"):
        return
    before = _unit_of_uncertainty(known.limit, intake.dictionary.get(known.quantity.parameter))
    if wanted is not None and before is not None and before != wanted:
        row.fault(
            "limit" if row.has("limit") else "parameter",
            f"the limit is in another unit than before, and the greatest uncertainty of the project, "
            f"{known.decision_rule.greatest_uncertainty:g} {before.symbol}, is no amount of it",
            "add the column Greatest uncertainty and state it in the new unit",
        )


def provers(row: SheetRow, intake: Intake) -> Provers:
    """Read "any one", "each of: SN1, SN2" or "number of: 3", with "together" where items may complete each other."""
    text = row.text("proved_by")
    if not text:
        return Provers()
    parts = _PROVERS.match(text)
    if parts is None:
        row.fault(
            "proved_by",
            f"{text!r} does not say who proves it",
            "write any one, each of: SN1, SN2 or number of: 3",
        )
        return Provers()
    together = parts["together"] is not None
    rule = parts["rule"].casefold()
    if rule == "each of":
        return Provers(
            rule="each of", items=_items(row, intake, parts["rest"]), may_complete_each_other=together
        )
    if rule == "number of":
        return _number_of(row, parts["rest"], together)
    return Provers(may_complete_each_other=together)


def _number_of(row: SheetRow, text: str, together: bool) -> Provers:
    if not text.isdecimal() or int(text) < 1:
        row.fault("proved_by", f"{text!r} is no number of items", "write number of: 3")
        return Provers()
    return Provers(rule="number of", number=int(text), may_complete_each_other=together)


def _items(row: SheetRow, intake: Intake, text: str) -> tuple[str, ...]:
    names = tuple(part.strip() for part in re.split(r"[,;\n]", text) if part.strip())
    if not names:
        row.fault("proved_by", "no item is named", "write each of: SN1, SN2")
    return known_items(row, "proved_by", names, intake)


def stated_tolerance(row: SheetRow) -> TestTolerance | None:
    """Read the test tolerance in its own column: "0.7 dB", "0.5 dB on the stimulus"."""
    text = row.text("test_tolerance")
    amount = _STIMULUS.sub("", text)
    found = (
        row.attempt("test_tolerance", lambda: (parse_quantity(amount), split_quantity(amount)))
        if text
        else None
    )
    if found is None:
        return None
    quantity, (_, unit) = found
    number = Number(text=repr(float(quantity.value)), unit=unit)
    return TestTolerance(amount=number, place="limit" if amount == text else "stimulus")
