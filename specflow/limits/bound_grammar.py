"""The grammar of bounds, as engineers write them.

>= 45 dBm | 45 dBm min | at least 45 dBm | < -36 dBm/MHz | 3..5 V | -6 to +4 dB | between 3 and 5 V
54 ± 1.5 dBm | 26 +2/-3 dBm | ± 0.1 ppm | within 3.4 dB of P_rated[dBm] | gain >= 20 dB | 3.2 dB
"""

from __future__ import annotations

from specflow.errors import ExpressionError
from specflow.limits.draft import Bare, Draft, Typical
from specflow.limits.expression_grammar import last_unit
from specflow.limits.expression_shape import plain_number, walk
from specflow.limits.expression_text import expression_text
from specflow.limits.phrases import COMPARED, FOLLOWED, LED, NOMINAL, OPENINGS, TYPICAL
from specflow.limits.settling import is_bare_arithmetic
from specflow.limits.tolerance_grammar import (
    PLUS_MINUS,
    nominal_unit,
    read_about_zero,
    read_asymmetric_about_zero,
    read_tolerance,
    read_within,
    two_sided_zero,
)
from specflow.limits.value_grammar import plain, read_valued, takes_own_name
from specflow.model.expression import Expression, Name, Number, Operation
from specflow.model.limit import (
    Alternatives,
    Between,
    Bound,
    LimitNode,
    OfQuantity,
    Side,
    Stringency,
    Undefined,
)
from specflow.model.parameter import Better


def read_bound(draft: Draft) -> LimitNode | Bare | Typical:
    """Read one bound, or a value that still lacks its direction, or one that is only typical."""
    reader = draft.reader
    _take_opening(draft)
    sign = None if reader.sees("=", "==") and not reader.sees("=<", "=>") else reader.take(*COMPARED)
    if sign is not None:
        side, strict = COMPARED[sign]
        return _sided(draft, side, strict)
    if not reader.sees_call():
        led = reader.take_words(*LED)
        if led is not None:
            side, strict = LED[led]
            reader.take(".")
            reader.take(":", "=")
            return _sided(draft, side, strict)
        if reader.sees_words(*TYPICAL):
            return _typical_first(draft)
    return _read_phrase(draft) or _valued(draft)


def _take_opening(draft: Draft) -> None:
    """Take the requirement's own name and the verb in front of a bound: "EIRP: ...", "EIRP shall be ..."."""
    reader = draft.reader
    start = reader.place
    named = takes_own_name(draft)
    if named and reader.take(":") is None and not reader.sees_words(*OPENINGS, *LED) and not reader.sees("="):
        reader.place = start
    reader.take_words(*OPENINGS)


def _read_phrase(draft: Draft) -> LimitNode | None:
    """Read a bound that begins with a word or sign of its own; None where a value is next."""
    reader = draft.reader
    if reader.take_words("between") is not None:
        return _between(draft, "and")
    if reader.take_words("from") is not None:
        return _between(draft, "to")
    if reader.take_words("within") is not None:
        return read_within(draft)
    if reader.take_words("better than") is not None:
        return _better_than(draft)
    if reader.take(*PLUS_MINUS) is not None:
        return read_about_zero(draft)
    if reader.sees("=", "!", "≠"):
        reader.fail("an exact value cannot be proved by measurement", hint="give a tolerance: '54 ± 1.5 dBm'")
    return None


def _better_than(draft: Draft) -> LimitNode:
    """Read ``better than -30 dBc``: the direction is that of the parameter."""
    place = draft.reader.place
    value, written = read_valued(draft)
    if draft.better not in (Better.LOWER, Better.HIGHER):
        shown = f"{expression_text(value)} {written}".strip()
        draft.reader.fail(
            "'better than' does not say whether more or less is better here",
            hint=f"write '>= {shown}' or '<= {shown}'",
            place=place,
        )
    return directed(draft, Bare(value, written, place))


def _typical_first(draft: Draft) -> Typical:
    """Read ``typ. 2 dB``."""
    place = draft.reader.place
    draft.reader.take_words(*TYPICAL)
    draft.reader.take(":", "=")
    read_valued(draft)
    return Typical(draft.reader.written_since(place), place)


def _sided(draft: Draft, side: Side, strict: bool) -> LimitNode:
    place = draft.reader.place
    if draft.reader.take_words("TBD") is not None:
        return Undefined(side=side, unit=draft.reader.take_unit() or "")
    value, written = read_valued(draft)
    return _bound(draft, side, strict, Bare(value, written, place))


def _bound(draft: Draft, side: Side, strict: bool, bare: Bare) -> Bound:
    unit = draft.settle([bare.value], bare.written, bare.place)
    _refuse_arithmetic(draft, bare)
    return Bound(side=side, value=plain(bare.value, unit), unit=unit, strict=strict)


def _refuse_arithmetic(draft: Draft, bare: Bare) -> None:
    """Refuse 3-5 V, 22 dB +1 dB -0.5 dB and 20/23 dB, which would else be computed: something else may be meant."""
    if not is_bare_arithmetic(bare.value) or draft.reader.text.startswith("(", bare.place):
        return
    numbers = [part for part in walk(bare.value) if isinstance(part, Number)]
    unit = bare.written or next((part.unit for part in reversed(numbers) if part.unit), "") or draft.hint
    first, second = (part.text for part in numbers[:2])
    if len(numbers) == 2 and float(first) < float(second):
        meant = f"'{first}..{second} {unit}'"
    elif len(numbers) == 3:
        meant = f"'{first} +{second}/-{numbers[2].text} {unit}'"
    else:
        meant = f"'{first} ± {second} {unit}'"
    sort = "quotient" if isinstance(bare.value, Operation) and bare.value.sign == "/" else "sum"
    draft.reader.fail(
        f"a {sort} of plain numbers may be meant as a range or a tolerance",
        hint=f"write {meant} if that is meant, or put the {sort} in parentheses",
        place=bare.place,
    )


def directed(draft: Draft, bare: Bare, side: Side | None = None) -> LimitNode:
    """Give a bare value its direction: its neighbour's, or the one that is better for the parameter."""
    if side is not None:
        draft.say(f"{expression_text(bare.value)} has the direction of its neighbour")
        return _bound(draft, side, False, bare)
    if draft.better is Better.NEARER_ZERO:
        _refuse_arithmetic(draft, bare)
        draft.say("no direction is written; nearer to zero is better, so it is read as ±")
        return two_sided_zero(draft, bare.value, bare.written, bare.place)
    if draft.better in (Better.LOWER, Better.HIGHER):
        lower_is_better = draft.better is Better.LOWER
        draft.say(
            f"no direction is written; {'lower' if lower_is_better else 'higher'} is better, "
            f"so it is read as {'at most' if lower_is_better else 'at least'}"
        )
        return _bound(draft, Side.UPPER if lower_is_better else Side.LOWER, False, bare)
    raise _no_direction(draft, bare)


def _no_direction(draft: Draft, bare: Bare) -> ExpressionError:
    """Return the error for a value that nobody gives a direction, naming a missing unit too."""
    lacks = not bare.written and not nominal_unit(bare.value)
    if not lacks:
        draft.settle([bare.value], bare.written, bare.place)
    _refuse_arithmetic(draft, bare)
    shown = f"{expression_text(bare.value)} {bare.written or (lacks and (draft.hint or 'dBm')) or ''}".strip()
    return draft.reader.error(
        "the limit has no unit and no direction" if lacks else "the limit has no direction",
        hint=f"write '>= {shown}' or '{shown} min', '<= {shown}' or '{shown} max', or a tolerance with ±",
        place=bare.place,
    )


def _valued(draft: Draft) -> LimitNode | Bare | Typical:
    reader = draft.reader
    place = reader.place
    if reader.take_words("TBD") is not None:
        return _undefined(draft)
    about_zero = read_asymmetric_about_zero(draft)
    if about_zero is not None:
        return about_zero
    value, written = read_valued(draft)
    if isinstance(value, Name) and not written and reader.sees(*COMPARED):
        return _of_quantity(draft, value)
    if reader.sees(*COMPARED):
        return _chained(draft, value, written, place)
    if reader.take_words(*TYPICAL) is not None:
        return Typical(reader.written_since(place), place)
    nominal = reader.take_words(*NOMINAL) is not None
    toleranced = read_tolerance(draft, value, written, place)
    if toleranced is not None:
        return toleranced
    if nominal:
        return Typical(reader.written_since(place), place)
    if reader.take("...", "..", "…", "–") is not None or reader.take_words("to") is not None:
        return _range(draft, value, written, place)
    if draft.better is not None:
        reader.take_words("or better")
    side = reader.take_words(*FOLLOWED)
    if side is not None and not written and not last_unit(value):
        written = reader.take_unit() or ""  # 2.5 max dB
    bare = Bare(value, written, place)
    return bare if side is None else _bound(draft, FOLLOWED[side], False, bare)


def _undefined(draft: Draft) -> LimitNode:
    unit = draft.reader.take_unit() or ""
    side = draft.reader.take_words(*FOLLOWED)
    return Undefined(side=FOLLOWED[side] if side else None, unit=unit)


def _of_quantity(draft: Draft, name: Name) -> LimitNode:
    side, strict = COMPARED[draft.reader.take(*COMPARED) or ""]
    own = name.name.casefold() in draft.own_names
    saved = draft.hint
    draft.hint = saved if own else ""
    bound = _sided(draft, side, strict)
    draft.hint = saved
    return bound if own else OfQuantity(quantity=name.name, limit=bound)


def _chained(draft: Draft, low: Expression, written: str, place: int) -> LimitNode:
    """Read ``3 V <= supply <= 5 V`` (or with > both ways) as two bounds on one quantity."""
    reader = draft.reader
    sign = reader.take(*COMPARED) or ""
    name = reader.take_name()
    second = reader.take(*COMPARED)
    if second is None and name is not None and name.casefold() in draft.own_names:
        side, strict = COMPARED[sign]
        turned = Side.LOWER if side is Side.UPPER else Side.UPPER
        return _bound(draft, turned, strict, Bare(low, written, place))
    if name is None or second is None or COMPARED[second][0] is not COMPARED[sign][0]:
        reader.fail(
            "a comparison has the value on the right", hint="write 'gain >= 20 dB' or '>= 20 dB'", place=place
        )
    right_side, right_strict = COMPARED[second]
    high, high_unit = read_valued(draft)
    unit = draft.settle([low, high], high_unit or written, place)
    left_side = Side.LOWER if right_side is Side.UPPER else Side.UPPER
    members: tuple[LimitNode, ...] = (
        Bound(side=left_side, value=plain(low, unit), unit=unit, strict=COMPARED[sign][1]),
        Bound(side=right_side, value=plain(high, unit), unit=unit, strict=right_strict),
    )
    both = Alternatives(rule=Stringency.STRICTER, members=members)
    return both if name.casefold() in draft.own_names else OfQuantity(quantity=name, limit=both)


def _range(draft: Draft, low: Expression, low_unit: str, place: int) -> LimitNode:
    high, high_unit = read_valued(draft)
    unit = draft.settle([low, high], high_unit or low_unit, place)
    low, high = plain(low, unit), plain(high, unit)
    ends = plain_number(low), plain_number(high)
    if ends[0] is not None and ends[1] is not None and ends[0] > ends[1]:
        if ends[1] >= 0:
            # 5..3 dB may be a slip of the pen; 0 to -3 dB can only be meant as a range.
            draft.reader.fail(
                "the lower end of the range is above the upper one",
                hint=f"write '{expression_text(high)}..{expression_text(low)} {unit}'",
                place=place,
            )
        draft.say("the range is written from its upper end down")
        low, high = high, low
    return Between(lower=low, upper=high, unit=unit)


def _between(draft: Draft, joint: str) -> LimitNode:
    place = draft.reader.place
    low, unit = read_valued(draft)
    if draft.reader.take_words(joint) is None:
        draft.reader.fail(f"expected {joint!r} between the two ends of the range", hint="between 3 and 5 V")
    return _range(draft, low, unit, place)
