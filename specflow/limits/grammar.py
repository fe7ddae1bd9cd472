"""The grammar of a whole limit: clauses joined by 'or' and 'and', each a bound or shape with what follows it.

limit  = clause { "or" clause } [ "," "whichever is" ("looser" | "stricter" | ...) ] | clause { "and" clause }
clause = [ "TBR" ] ( bound | shape | "{" limit "}" | "TBD" | "FFS" | "no limit" | "n/a" ) { postfix }
postfix= "if" condition | "in" bandwidth | "allow" share "by" amount | "(TBR)"
       | "at" n "%" "of" ("CDF" | "CCDF") population | "at" n "/" n population | "worst" population
       | "mean" [ "of" ("power" | "dB" | "squares") ] population | "with" n "exceptions" [ "within" bound ]
       | "rounded" [ "up" | "down" ] "to" step | "test tolerance" amount [ "on stimulus" ]
population = [ "of" value ] [ "over" name { "," name } ] [ "where" condition ] [ "from at least" n ]
"""

from __future__ import annotations

import re
from typing import Literal

from specflow.limits.bound_grammar import directed, read_bound
from specflow.limits.draft import Bare, Draft
from specflow.limits.expression_grammar import read_condition
from specflow.limits.expression_shape import is_condition
from specflow.limits.population_grammar import read_population, read_statistic
from specflow.limits.reader import RESERVED, Reader
from specflow.limits.shape_grammar import (
    read_allowance,
    read_amount,
    read_bandwidth,
    read_by,
    read_cases,
    read_mask,
    read_members,
    read_power_sum,
)
from specflow.limits.tree import side_of, tree_units, undefined_in
from specflow.model.expression import Number
from specflow.model.limit import (
    Allowed,
    Alternatives,
    Exceptions,
    Gate,
    Limit,
    LimitNode,
    LimitState,
    MeasuredIn,
    NoLimit,
    OfQuantity,
    Population,
    Rounding,
    Rule,
    Side,
    TestTolerance,
    Undefined,
)
from specflow.model.parameter import Better, Parameter

_NO_LIMIT = ("no upper limit", "no lower limit", "no limit", "not required", "unlimited")
_NOT_APPLICABLE = ("not applicable", "n/a", "n.a.", "N-A")
_LOOSER = ("looser", "less stringent", "less strict", "more relaxed")
_STRICTER = ("stricter", "more stringent", "tighter")
_LOWER = ("lower", "smaller", "less")
_HIGHER = ("higher", "greater", "larger")
_QUANTITY = re.compile(r"([^\W\d][\w.]*) *: *\{")
_TENTATIVE = re.compile(r"\[( *[-+±<>=≤≥]* *\d[\d., ]*)\]")


def parse_limit(
    text: str, *, unit_hint: str = "", parameter: Parameter | None = None, better: Better | None = None
) -> Limit:
    """Read a limit as engineers write it.

    ``unit_hint`` or the parameter's unit serves numbers without a unit; ``better`` or the parameter's direction
    serves a value without one. Raises ExpressionError with the column (counted from 1) and what would help.
    """
    reader = Reader(text)
    draft = Draft(reader, hint=unit_hint, better=better)
    if parameter is not None:
        draft.hint = unit_hint or parameter.unit
        draft.better = better or parameter.better
        draft.own_names = frozenset(name.casefold() for name in (parameter.key, *parameter.aliases))
    if reader.done():
        reader.fail("the limit is empty", hint="write it, or TBD, or 'no limit'")
    _read_tentative(draft)
    tree = read_limit(draft)
    if not reader.done():
        reader.fail(f"nothing can be made of {reader.rest!r}", hint=_left_over(reader))
    return _finished(text, draft, tree)


def _left_over(reader: Reader) -> str:
    """Say what to do with what engineers often write behind a limit."""
    if reader.sees_words("typ", "typical", "nominal", "nom"):
        return "a typical value is no limit; put it in the note"
    if reader.sees("@", "(") or reader.sees_words("at", "over", "for", "from"):
        return "conditions belong in the conditions set, a measurement bandwidth after 'in'"
    return ""


def _read_tentative(draft: Draft) -> None:
    """Square brackets around a number mark it as tentative (3GPP drafting): they count as TBR."""
    if not _TENTATIVE.search(draft.reader.text):
        return
    draft.reader.text = _TENTATIVE.sub(r" \1 ", draft.reader.text)
    draft.reader.take()
    draft.reader.place = len(draft.reader.text) - len(draft.reader.text.lstrip())
    draft.state = LimitState.TBR
    draft.say("the number in square brackets is tentative: TBR")


def _finished(text: str, draft: Draft, tree: LimitNode) -> Limit:
    units = tree_units(tree)
    return Limit(
        text=text,
        state=LimitState.TBD if undefined_in(tree) else draft.state,
        tree=tree,
        unit=units[0] if len(units) == 1 else "",
        rounding=draft.rounding,
        test_tolerance=draft.test_tolerance,
        readings=tuple(draft.readings),
    )


def read_limit(draft: Draft) -> LimitNode:
    """Read a limit up to a closing bracket, a semicolon or the end."""
    reader = draft.reader
    with reader.deeper():
        clauses = [read_clause(draft)]
        joint = _take_joint(draft)
        while joint is not None:
            clauses.append(read_clause(draft))
            following = _take_joint(draft)
            if following not in (None, joint):
                reader.fail("'or' and 'and' are mixed", hint="group with braces: {A or B} and C")
            if following is None:
                break
        return _joined(draft, clauses, joint)


_NEXT_BOUND = re.compile(r"[,;] *(?:[<>≤≥⩽⩾]|(?:max|min)(?:imum)?\b(?! *\())", re.IGNORECASE)


def _take_joint(draft: Draft) -> str | None:
    """Take 'or' or 'and'; a comma (outside brackets a semicolon too) before another bound means 'and'."""
    reader = draft.reader
    if _NEXT_BOUND.match(reader.text, reader.place) and not (draft.inner and reader.sees(";")):
        reader.take(",", ";")
        return "and"
    return reader.take_words("or", "and")


def _joined(draft: Draft, clauses: list[LimitNode | Bare], joint: str | None) -> LimitNode:
    if joint is None:
        only = clauses[0]
        return directed(draft, only) if isinstance(only, Bare) else only
    sides = {side_of(clause) for clause in clauses if not isinstance(clause, Bare)}
    side = next(iter(sides)) if len(sides) == 1 else None
    members = tuple(directed(draft, part, side) if isinstance(part, Bare) else part for part in clauses)
    return Alternatives(rule=_rule(draft, joint, members), members=members)


def _rule(draft: Draft, joint: str, members: tuple[LimitNode, ...]) -> Rule:
    reader = draft.reader
    place = reader.place
    comma = reader.take(",")
    if reader.take_words("whichever is the", "whichever is", "whichever") is None:
        if comma is not None:
            reader.fail("expected 'whichever is looser' or 'whichever is stricter' after the comma")
        return Rule.LOOSER if joint == "or" else Rule.STRICTER
    if reader.take_words(*_LOOSER) is not None:
        return Rule.LOOSER
    if reader.take_words(*_STRICTER) is not None:
        return Rule.STRICTER
    word = reader.take_words(*_LOWER, *_HIGHER)
    sides = {side_of(member) for member in members}
    if word is None or len(sides) != 1 or None in sides:
        reader.fail(
            "which of the alternatives governs?", hint="whichever is looser, or stricter", place=place
        )
    looser = (word in _HIGHER) == (sides == {Side.UPPER})
    return Rule.LOOSER if looser else Rule.STRICTER


def read_clause(draft: Draft) -> LimitNode | Bare:
    """Read one bound or shape and everything that follows it."""
    reader = draft.reader
    if reader.sees_words("TBR", "TBC"):
        _take_tbr(draft)
        reader.take(":")
        if reader.done():
            reader.fail("TBR needs its number", hint="TBR 3.2 dB; a limit without a number is TBD")
    node = _read_primary(draft)
    while True:
        place = reader.place
        if _take_whole(draft):
            continue
        if isinstance(node, Bare) and _sees_postfix(reader):
            node = directed(draft, node)
        after = None if isinstance(node, Bare) else _read_postfix(draft, node)
        if after is None:
            return node
        node = after
        if reader.place == place:
            return node


def _read_primary(draft: Draft) -> LimitNode | Bare:
    reader = draft.reader
    if reader.take("{") is not None:
        with draft.inside():
            node = read_limit(draft)
        reader.expect("}", "the limit in braces")
        return node
    if reader.take_words(*_NO_LIMIT) is not None:
        return NoLimit()
    if reader.take_words(*_NOT_APPLICABLE) is not None:
        return NoLimit(label="not applicable")
    if reader.take_words("FFS") is not None:
        return Undefined(label="FFS")
    if reader.take_words("by") is not None:
        return read_by(draft, read_limit)
    for word in ("cases", "mask", "looser", "stricter", "sum"):
        if re.compile(rf"{word} *\(", re.IGNORECASE).match(reader.text, reader.place):
            return _read_shape(draft, word)
    named = _QUANTITY.match(reader.text, reader.place)
    if named is not None and named.group(1).lower() not in RESERVED:
        return _read_named(draft)
    return read_bound(draft)


def _read_named(draft: Draft) -> LimitNode:
    """Read ``quantity: {limit}``: a limit on another quantity than the requirement's own."""
    quantity = draft.reader.take_name() or ""
    own = quantity.casefold() in draft.own_names
    saved, draft.hint = draft.hint, draft.hint if own else ""
    draft.reader.take(":")
    draft.reader.take("{")
    with draft.inside():
        limit = read_limit(draft)
    draft.reader.expect("}", "the limit in braces")
    draft.hint = saved
    return limit if own else OfQuantity(quantity=quantity, limit=limit)


def _read_shape(draft: Draft, word: str) -> LimitNode:
    draft.reader.take_words(word)
    draft.reader.take("(")
    with draft.inside():
        match word:
            case "cases":
                return read_cases(draft, read_limit)
            case "mask":
                return read_mask(draft)
            case "sum":
                return read_power_sum(draft, read_limit)
        return read_members(draft, read_limit, Rule.LOOSER if word == "looser" else Rule.STRICTER)


def _take_tbr(draft: Draft) -> bool:
    reader = draft.reader
    place = reader.place
    if reader.take("(TBR)", "(tbr)", "(TBC)") is None and reader.take_words("TBR", "TBC") is None:
        return False
    if draft.inner:
        reader.fail("TBR belongs to the whole limit, not inside", place=place)
    draft.state = LimitState.TBR
    return True


def _take_whole(draft: Draft) -> bool:
    """Take what belongs to the limit as a whole: TBR, rounding, test tolerance."""
    reader = draft.reader
    place = reader.place
    if _take_tbr(draft):
        return True
    if reader.take_words("rounded") is not None:
        draft.whole_only("the rounding", place)
        word = reader.take_words("up", "down")
        method: Literal["nearest", "up", "down"] = (
            "up" if word == "up" else "down" if word == "down" else "nearest"
        )
        if reader.take_words("to") is None:
            reader.fail("expected 'to' and the step of rounding", hint="rounded to 0.1")
        step = reader.take_number()
        if step is None or float(step) <= 0:
            reader.fail("the step of rounding is a positive number", hint="rounded to 0.1")
        draft.rounding = Rounding(step=Number(text=step, unit=reader.take_unit() or ""), method=method)
        return True
    if reader.take_words("test tolerance") is not None:
        draft.whole_only("the test tolerance", place)
        amount = read_amount(draft, "the test tolerance")
        stimulus = reader.take_words("on the stimulus", "on stimulus") is not None
        draft.test_tolerance = TestTolerance(amount=amount, place="stimulus" if stimulus else "limit")
        return True
    return False


_POSTFIXES = ("if", "only if", "when", "in", "measured in", "allow", "at", "worst", "mean", "with")


def _sees_postfix(reader: Reader) -> bool:
    return reader.sees_words(*_POSTFIXES)


def _read_postfix(draft: Draft, node: LimitNode) -> LimitNode | None:
    reader = draft.reader
    if reader.take_words("only if", "if", "when") is not None:
        place = reader.place
        when = read_condition(reader)
        if not is_condition(when):
            reader.fail(
                "a value stands where a condition belongs", hint="if adjacent_power > -35 dBm", place=place
            )
        return Gate(when=when, limit=node)
    if reader.take_words("measured in", "in") is not None:
        return MeasuredIn(limit=node, bandwidth=read_bandwidth(draft))
    if reader.take_words("allow") is not None:
        return Allowed(limit=node, allowance=read_allowance(draft))
    if reader.take_words("with") is not None:
        return Population(limit=node, statistic=_exceptions(draft))
    statistic = read_statistic(draft)
    return None if statistic is None else read_population(draft, node, statistic)


def _exceptions(draft: Draft) -> Exceptions:
    reader = draft.reader
    number = reader.take_number()
    if number is None or not number.isdigit() or int(number) < 1:
        reader.fail("expected the number of exceptions", hint="with 3 exceptions within ± 11 dB")
    if reader.take_words("exceptions", "exception") is None:
        reader.fail("expected 'exceptions' after their number", hint="with 3 exceptions within ± 11 dB")
    if reader.take_words("within") is None:
        return Exceptions(count=int(number))
    with draft.inside():
        relaxed = _read_primary(draft)
    return Exceptions(
        count=int(number), relaxed=directed(draft, relaxed) if isinstance(relaxed, Bare) else relaxed
    )
