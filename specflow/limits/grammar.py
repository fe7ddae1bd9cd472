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
from collections.abc import Sequence
from typing import NoReturn

from specflow.errors import ExpressionError
from specflow.limits.at_grammar import joined_cases, read_at
from specflow.limits.bound_grammar import directed, read_bound
from specflow.limits.conversion import conversion
from specflow.limits.draft import Bare, Draft, Typical
from specflow.limits.expression_grammar import read_condition
from specflow.limits.expression_shape import is_condition
from specflow.limits.joint_grammar import read_rule, take_joint, take_typical_remark, without_typical
from specflow.limits.population_grammar import read_population, read_statistic
from specflow.limits.reader import RESERVED, Reader, canonical_unit
from specflow.limits.shape_grammar import (
    read_allowance,
    read_bandwidth,
    read_by,
    read_cases,
    read_mask,
    read_members,
    read_power_sum,
)
from specflow.limits.suggestion import better_told
from specflow.limits.text import node_text
from specflow.limits.tree import side_of, tree_units, undefined_in
from specflow.limits.whole_grammar import read_tentative, take_tbr, take_whole
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
    Stringency,
    Undefined,
)
from specflow.model.parameter import Better, Parameter

_NO_LIMIT = ("no upper limit", "no lower limit", "no limit", "not required", "unlimited")
_NOT_APPLICABLE = ("not applicable", "n/a", "n.a.", "N-A")
_QUANTITY = re.compile(r"([^\W\d][\w.]*) *: *\{")
_RANGE_BEHIND = re.compile(r"(\d+(?:\.\d+)?)(?: *[kMG]?Hz)? *(?:-|–|to|\.\.+|…) *(\d+(?:\.\d+)?) *([kMG]?Hz)")
_TABLE = re.compile(r" *(\d+(?:\.\d+)?)(?: *[kMG]?Hz)? *(?:-|–|to|\.\.+|…) *(\d+(?:\.\d+)?) *([kMG]?Hz) *:")


def parse_limit(
    text: str, *, unit_hint: str = "", parameter: Parameter | None = None, better: Better | None = None
) -> Limit:
    """Read a limit as engineers write it.

    ``unit_hint`` or the parameter's unit serves numbers without a unit; ``better`` or the parameter's direction
    serves a value without one. Raises ExpressionError with the column (counted from 1) and what would help.
    """
    hint = unit_hint or (parameter.unit if parameter is not None else "")
    direction = better or (parameter.better if parameter is not None else None)
    own = frozenset(name.casefold() for name in _names_of(parameter))

    def reads(spelling: str) -> Limit:
        return _read(spelling, hint, direction, own)

    try:
        return reads(text)
    except ExpressionError as error:
        raise better_told(error, text, hint, direction, reads) from None


def _names_of(parameter: Parameter | None) -> tuple[str, ...]:
    return () if parameter is None else (parameter.key, parameter.title, *parameter.aliases)


def _read(text: str, hint: str, better: Better | None, own_names: frozenset[str]) -> Limit:
    reader = Reader(text)
    draft = Draft(reader, hint=hint, better=better, own_names=own_names)
    if reader.done():
        reader.fail("the limit is empty", hint="write it, or 'TBD', or 'no limit'")
    read_tentative(draft)
    tree = read_limit(draft)
    if not reader.done():
        _refuse_rest(draft, tree)
    return _finished(text, draft, tree)


def _refuse_rest(draft: Draft, tree: LimitNode | None) -> NoReturn:
    """Fail with what is left over, and what to do with what engineers often write behind a limit."""
    reader = draft.reader
    hint = ""
    if reader.sees("@", "(", ",") or reader.sees_words("at", "over", "for", "from", "within", "across"):
        hint = "conditions belong in the conditions set, a measurement bandwidth after 'in'"
        ranged = _RANGE_BEHIND.search(reader.rest_of_text)
        if ranged is not None and tree is not None and (unit := canonical_unit(ranged[3])):
            table = f"by frequency[{unit}] ({ranged[1]}..{ranged[2]}: {node_text(tree)})"
            hint += f"; or, if it is the frequency: '{table}'"
    if tree is not None and _may_be_of(tree, draft.hint):
        hint = f"{hint}{'; ' * bool(hint)}what stands before it would be '{node_text(tree)}'"
    reader.fail(f"nothing can be made of {reader.rest!r}", hint=hint)


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


def _may_be_of(tree: LimitNode, unit: str) -> bool:
    """Tell whether a limit may be one of a quantity in this unit."""
    return (
        not unit or any(conversion(own, unit) is not None for own in tree_units(tree)) or not tree_units(tree)
    )


def read_limit(draft: Draft) -> LimitNode:
    """Read a limit up to a closing bracket, a semicolon or the end."""
    reader = draft.reader
    with reader.deeper():
        _refuse_table(draft)
        clauses = [read_clause(draft)]
        joint = take_joint(draft, clauses[0])
        while joint is not None:
            clauses.append(read_clause(draft))
            following = take_joint(draft, clauses[-1])
            if following not in (None, joint):
                reader.fail(
                    "'or' and 'and' are mixed", hint="group with braces: '{>= 3 dB or >= 4 dB} and <= 9 dB'"
                )
            if following is None:
                break
        return _joined(draft, without_typical(draft, clauses), joint)


def _refuse_table(draft: Draft) -> None:
    """Ask for the name of the condition in ``27.5-28 GHz: 45 dBm; ...``."""
    table = None if draft.inner else _TABLE.match(draft.reader.text)
    if table is not None:
        draft.reader.fail(
            f"{table[0].strip(' :')} does not say which frequency it is",
            hint=f"name the condition: 'by frequency[{table[3]}] ({table[1]}..{table[2]}: >= 45 dBm; ...)', as in "
            "'by frequency[GHz] (27.5..28: >= 45 dBm; 28..30: >= 46 dBm)'",
            place=0,
        )


def _joined(draft: Draft, clauses: Sequence[LimitNode | Bare], joint: str | None) -> LimitNode:
    if joint is None or len(clauses) == 1:
        only = clauses[0]
        return _sole(draft, only) if isinstance(only, Bare) else only
    sides = {side_of(clause) for clause in clauses if not isinstance(clause, Bare)}
    side = next(iter(sides)) if len(sides) == 1 else None
    members = tuple(directed(draft, part, side) if isinstance(part, Bare) else part for part in clauses)
    table = joined_cases(members) if joint == "and" else None
    return table or Alternatives(rule=read_rule(draft, joint, members), members=members)


def _sole(draft: Draft, bare: Bare) -> LimitNode:
    """Give the only value its direction; where it has none, what is left over comes first."""
    reader = draft.reader
    try:
        return directed(draft, bare)
    except ExpressionError:
        if draft.better in (None, Better.NEITHER) and not reader.done() and not reader.sees(")", "}", ";"):
            _refuse_rest(draft, None)
        raise


def read_clause(draft: Draft) -> LimitNode | Bare | Typical:
    """Read one bound or shape and everything that follows it."""
    reader = draft.reader
    if reader.sees_words("TBR", "TBC"):
        word = reader.rest
        take_tbr(draft)
        reader.take(":")
        if reader.done():
            reader.fail(
                f"{word} needs its number", hint="write 'TBR <= 3.2 dB'; a limit without a number is 'TBD'"
            )
    node = _read_primary(draft)
    if isinstance(node, Typical):
        return node
    while True:
        place = reader.place
        take_typical_remark(draft)
        if take_whole(draft):
            continue
        if isinstance(node, Bare) and _sees_postfix(reader):
            node = directed(draft, node)
        after = None if isinstance(node, Bare) else _read_postfix(draft, node)
        if after is None:
            return node
        node = after
        if reader.place == place:
            return node


def _read_primary(draft: Draft) -> LimitNode | Bare | Typical:
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
    if reader.take_words("t.b.d.") is not None:
        return Undefined()
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
        return read_members(draft, read_limit, Stringency.LOOSER if word == "looser" else Stringency.STRICTER)


_POSTFIXES = ("if", "only if", "when", "in", "measured in", "allow", "at", "worst", "mean", "with")


_BANDWIDTH_WORDS = (
    "resolution bandwidth",
    "measurement bandwidth",
    "reference bandwidth",
    "bandwidth",
    "RBW",
)
#: "-36 dBm (RBW 100 kHz)", "-36 dBm, RBW = 100 kHz"
_BEFORE_BANDWIDTH = re.compile(
    rf"[,(]? *(?:{'|'.join(_BANDWIDTH_WORDS)})(?!\w) *[:=]? *(?=\d)", re.IGNORECASE
)


def _sees_postfix(reader: Reader) -> bool:
    behind = reader.sees("@") or _BEFORE_BANDWIDTH.match(reader.text, reader.place) is not None
    return behind or reader.sees_words(*_POSTFIXES)


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
        bandwidth = read_bandwidth(draft)
        reader.take_words(*_BANDWIDTH_WORDS)
        return MeasuredIn(limit=node, bandwidth=bandwidth)
    before = reader.take_pattern(_BEFORE_BANDWIDTH)
    if before is not None:
        bandwidth = read_bandwidth(draft)
        if before.startswith("("):
            reader.expect(")", "the measurement bandwidth")
        return MeasuredIn(limit=node, bandwidth=bandwidth)
    if reader.take_words("allow") is not None:
        return Allowed(limit=node, allowance=read_allowance(draft))
    if reader.take_words("with") is not None:
        return Population(limit=node, statistic=_exceptions(draft))
    at = read_at(draft, node)
    if at is not None:
        return at
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
    if isinstance(relaxed, Typical):
        reader.fail(
            "a typical value is no limit", hint="with 3 exceptions within ± 11 dB", place=relaxed.place
        )
    return Exceptions(
        count=int(number), relaxed=directed(draft, relaxed) if isinstance(relaxed, Bare) else relaxed
    )
