"""The grammar of expressions, by recursive descent; nothing is ever executed.

condition  = conjunction { "or" conjunction }
conjunction= inversion { "and" inversion }
inversion  = [ "not" ] comparison
comparison = sum [ ("<" | "<=" | ">" | ">=" | "=" | "==" | "!=") sum { ... } | [ "not" ] "in" set ]
sum        = product { ("+" | "-") product }
product    = factor { ("*" | "/") factor }
factor     = [ "-" | "+" ] power ;  power = atom [ ("^" | "**") factor ]
atom       = number [ unit ] [ "of" name ] | name [ "[" unit "]" ] | function "(" ... ")" | "(" choice ")"
choice     = condition [ "if" condition "else" choice ]
set        = "(" value { ("," | "|") value } ")" | value ;  value = word | number [ unit ] | low ".." high [ unit ]
"""

from __future__ import annotations

import re
from typing import cast

from specflow.limits.expression_shape import expression_depth, is_condition
from specflow.limits.reader import FUNCTION_NAMES, MAX_DEPTH, RESERVED, SHAPES, Reader, canonical_unit
from specflow.model.expression import (
    FUNCTIONS,
    Arithmetic,
    Call,
    Choice,
    Compare,
    Comparison,
    Expression,
    Function,
    Interval,
    Logic,
    Member,
    Name,
    Negative,
    Not,
    Number,
    Operation,
    Share,
    Word,
)

#: Endings of a name that declare its unit: f_offset_MHz is f_offset[MHz]. Single letters that are often part of a
#: name (A, V, K, s, m) are left out.
_ENDINGS = "Hz kHz MHz GHz dBm dBW dB W mW mV mA ms us ns ppm deg mm cm km"
_UNIT_ENDINGS = frozenset(_ENDINGS.split())
_COMPARISONS = {
    "<=": "<=", "≤": "<=", "=<": "<=", "⩽": "<=",
    ">=": ">=", "≥": ">=", "=>": ">=", "⩾": ">=",
    "!=": "!=", "≠": "!=", "<>": "!=",
    "==": "==", "<": "<", ">": ">", "=": "==",
}  # fmt: skip
COMPARISON_SIGNS = tuple(_COMPARISONS)
_STRING = re.compile(r"'[^']*'|\"[^\"]*\"")
_WORD = re.compile(r"\w[\w\-/.+]*\w|\w")
_FUNCTION = re.compile(rf"(?:{'|'.join(sorted(FUNCTION_NAMES, key=len, reverse=True))})(?=\s*\()")


def read_choice(reader: Reader) -> Expression:
    """Read a condition or value, possibly ``a if condition else b``."""
    with reader.deeper():
        then = read_condition(reader)
        if reader.take_words("if") is None:
            return then
        when = _condition_only(reader, read_condition(reader))
        if reader.take_words("else") is None:
            reader.fail("'if' inside an expression needs 'else'", hint="a if condition else b")
        otherwise = read_choice(reader)
        return _checked(reader, Choice(when=when, then=then, otherwise=otherwise))


def read_condition(reader: Reader) -> Expression:
    """Read ``... or ...`` of conditions, or a plain value when no condition is written."""
    return _read_logic(reader, "or")


def _read_logic(reader: Reader, sign: str) -> Expression:
    read = _read_conjunction if sign == "or" else _read_inversion
    first = read(reader)
    if not reader.sees_words(sign) or not is_condition(first):
        return first
    terms = [first]
    while is_condition(terms[-1]) and reader.take_words(sign) is not None:
        terms.append(_condition_only(reader, read(reader)))
    return _checked(reader, Logic(sign="or" if sign == "or" else "and", terms=tuple(terms)))


def _read_conjunction(reader: Reader) -> Expression:
    return _read_logic(reader, "and")


def _read_inversion(reader: Reader) -> Expression:
    if reader.take_words("not") is None:
        return _read_comparison(reader)
    with reader.deeper():
        return _checked(reader, Not(operand=_condition_only(reader, _read_inversion(reader))))


def _read_comparison(reader: Reader) -> Expression:
    left = read_sum(reader)
    if reader.take_words("not in") is not None:
        return Not(operand=Member(operand=_value_only(reader, left), values=_read_set(reader)))
    if reader.sees_words("in") and isinstance(left, Name):
        reader.take_words("in")
        return Member(operand=left, values=_read_set(reader))
    parts: list[Expression] = []
    while (sign := reader.take(*COMPARISON_SIGNS)) is not None:
        plain = cast(Comparison, _COMPARISONS[sign])
        right = _read_compared(reader, plain)
        compared = Compare(sign=plain, left=_value_only(reader, left), right=_value_only(reader, right))
        parts.append(_checked(reader, compared))
        left = right
    if not parts:
        return left
    return parts[0] if len(parts) == 1 else Logic(sign="and", terms=tuple(parts))


def _read_compared(reader: Reader, sign: Comparison) -> Expression:
    """Read the right side; after = and != a bare name is a word (band == n257)."""
    if sign in ("==", "!="):
        return read_value(reader)
    return read_sum(reader)


def read_value(reader: Reader) -> Expression:
    """Read a value to compare with: a word, quoted or bare, or a sum of numbers and names in brackets."""
    string = reader.take_pattern(_STRING)
    if string is not None:
        return Word(text=string[1:-1].strip())
    start = reader.place
    word = reader.take_pattern(_WORD)
    if word is not None and not _numeric(word) and not reader.sees("[", "("):
        return Word(text=word.rstrip("."))
    reader.place = start
    return read_sum(reader)


def _numeric(word: str) -> bool:
    """Tell whether a run of letters and digits is a number with or without a unit (5, 27.5GHz), not a word."""
    match = re.match(r"[\d.]+(?:[eE][+-]?\d+)?", word)
    if match is None:
        return False
    unit = word[match.end() :]
    return not unit or ".." in word or canonical_unit(unit) is not None


def _read_set(reader: Reader) -> tuple[Expression, ...]:
    if reader.take("(") is None:
        return (read_interval_or_value(reader),)
    reader.calls += 1
    values = [read_interval_or_value(reader)]
    while reader.take(",", "|") is not None:
        values.append(read_interval_or_value(reader))
    reader.calls -= 1
    reader.expect(")", "the values")
    return tuple(values)


def read_interval_or_value(reader: Reader) -> Expression:
    """Read one value or ``low..high``; ``<..`` leaves the low end out, ``..<`` the high one; ``<= x`` has one end."""
    sign = reader.take(*COMPARISON_SIGNS)
    if sign is not None:
        return _one_ended(reader, _COMPARISONS[sign], read_sum(reader))
    low = None if reader.sees("..", "<..") else read_value(reader)
    low_open = reader.sees("<..")
    if reader.take("<..", "..") is None:
        return cast(Expression, low)
    high_open = reader.take("<") is not None
    high = None if reader.done() or reader.sees(":", ")", ",", ";", "|") else read_sum(reader)
    low = None if low is None else _value_only(reader, low)
    return same_unit(Interval(low=low, high=high, low_open=low_open, high_open=high_open))


def _one_ended(reader: Reader, sign: str, end: Expression) -> Expression:
    if sign in ("<", "<="):
        return Interval(high=end, high_open=sign == "<")
    if sign in (">", ">="):
        return Interval(low=end, low_open=sign == ">")
    if sign == "==":
        return end
    raise reader.error("'!=' cannot stand in a list of values")


def same_unit(interval: Interval) -> Interval:
    """Give the low end the unit written after the high end only: 27.5..30 GHz."""
    low, high = interval.low, interval.high
    unit = last_unit(high) if high is not None else ""
    if low is None or not unit or last_unit(low):
        return interval
    return interval.model_copy(update={"low": with_unit(low, unit)})


def last_unit(node: Expression) -> str:
    """Return the unit of a signed number, "" for anything else."""
    if isinstance(node, Negative):
        return last_unit(node.operand)
    return node.unit if isinstance(node, Number) else ""


def with_unit(node: Expression, unit: str) -> Expression:
    """Give a signed number without a unit this one; leave anything else as it is."""
    if isinstance(node, Negative):
        return Negative(operand=with_unit(node.operand, unit))
    if isinstance(node, Number) and not node.unit:
        return Number(text=node.text, unit=unit)
    return node


def read_sum(reader: Reader) -> Expression:
    """Read an arithmetic expression."""
    left = _read_product(reader)
    while True:
        start = reader.place
        if reader.sees("+/-", "+-"):
            return left
        sign = reader.take("+", "-", "–") if not _starts_tolerance(reader) else None
        if sign is None:
            return left
        if sign == "–":
            reader.place = start
            return left
        right = _read_product(reader)
        left = _operation(reader, cast(Arithmetic, sign), left, right)


_TOLERANCE = re.compile(r"[+-] *[\d.,]+ *[^\s\d/]{0,6} */ *[+\-–] *[\d.]")


def _starts_tolerance(reader: Reader) -> bool:
    """Tell whether ``+2/-3`` follows: an asymmetric tolerance, not a sum."""
    return _TOLERANCE.match(reader.text, reader.place) is not None


#: "min 1 dB / typ 2 dB / max 3 dB" lists three values; nothing is divided.
_SIDE_AFTER_SLASH = re.compile(r"/ *(?:min|max|typ|nom)(?:imum|ical|inal)?\b(?! *\()", re.IGNORECASE)


def _read_product(reader: Reader) -> Expression:
    left = _read_factor(reader)
    while True:
        if reader.sees("**") or _SIDE_AFTER_SLASH.match(reader.text, reader.place):
            return left
        sign = reader.take("*", "·", "/")
        if sign is None:
            if isinstance(left, Number) and not left.unit and reader.sees_call():
                left = _operation(reader, "*", left, _read_factor(reader))
                continue
            return left
        left = _operation(reader, "/" if sign == "/" else "*", left, _read_factor(reader))


def _read_factor(reader: Reader) -> Expression:
    with reader.deeper():
        if reader.take("-", "–") is not None:
            return _checked(reader, Negative(operand=_value_only(reader, _read_factor(reader))))
        if reader.sees("+") and not reader.sees("+/-", "+-") and reader.take("+") is not None:
            return _read_factor(reader)
        start = reader.place
        base = _read_atom(reader)
        if reader.sees("^", "**") and isinstance(base, Number) and base.unit:
            reader.fail(
                f"a power of a value in {base.unit} is not computed",
                hint="write a unit with a slash, as in '>= 5 dB/K', and a power of ten as '1e-6'",
                place=start,
            )
        if reader.take("^", "**") is None:
            return base
        return _operation(reader, "^", base, _read_factor(reader))


def _read_atom(reader: Reader) -> Expression:
    if reader.take("(") is not None:
        saved, reader.calls = reader.calls, 0
        inner = read_choice(reader)
        reader.calls = saved
        reader.expect(")", "the expression in parentheses")
        return inner
    start = reader.place
    number = reader.take_number()
    if number is not None:
        return _read_after_number(reader, number)
    if reader.sees_call():
        return _read_call(reader)
    name = reader.take_name()
    if name is None:
        reader.fail("the text ends where a number or a name belongs" if reader.done() else
                    f"a number or a name belongs here, not {reader.rest!r}", place=start)  # fmt: skip
    if reader.text.startswith("(", start + len(name)):
        reader.fail(f"{name!r} is not a function", hint=f"functions are {', '.join(FUNCTIONS)}", place=start)
    if name.lower() in SHAPES:
        example = SHAPES[name.lower()]
        reader.fail(
            f"{name!r} begins a limit of several parts, in parentheses",
            hint=f"as in '{example}'",
            place=start,
        )
    if name.lower() in RESERVED:
        first = "say first what is required, as in '>= 20 dB if frequency > 28 GHz'"
        hint = first if start == 0 and name.lower() in ("if", "when", "where") else ""
        reader.fail(
            f"{name!r} is a word of the grammar; a number or a name belongs here", hint=hint, place=start
        )
    return read_after_name(reader, name)


def _read_after_number(reader: Reader, text: str) -> Expression:
    unit = reader.take_unit()
    if unit is None:
        reader.refuse_unknown_unit()
    number = Number(text=text, unit=unit or "")
    if not number.unit or reader.take_words("of") is None:
        return number
    reader.take_words("the")
    name = reader.take_name()
    if name is None:
        reader.fail("'of' needs the name of what the share is taken of", hint="0.05 ppm of carrier")
    named = read_after_name(reader, name)
    return Share(share=number, of=named)


def read_after_name(reader: Reader, name: str) -> Name:
    """Read the unit in brackets that may follow a name, and take a unit off its ending."""
    if reader.take("[") is None:
        return _named(name)
    start = reader.place
    unit = reader.take_unit()
    if unit is None:
        reader.fail("the brackets after a name hold its unit", hint="P_rated[dBm]", place=start)
    reader.expect("]", f"the unit of {name}")
    return Name(name=name, unit=unit)


def _named(name: str) -> Name:
    base, _, ending = name.rpartition("_")
    if base and ending in _UNIT_ENDINGS:
        return Name(name=base, unit=canonical_unit(ending) or "")
    return Name(name=name)


def _read_call(reader: Reader) -> Expression:
    start = reader.place
    function = reader.take_pattern(_FUNCTION) or ""
    if function == "log":
        reader.fail("'log' may be the logarithm to base 10 or e", hint="write log10 or ln", place=start)
    reader.expect("(", function)
    with reader.deeper():
        reader.calls += 1
        arguments = [_value_only(reader, read_choice(reader))]
        while reader.take(",") is not None:
            arguments.append(_value_only(reader, read_choice(reader)))
        reader.calls -= 1
    reader.expect(")", f"the arguments of {function}")
    fewest, most = FUNCTIONS[function]
    if not fewest <= len(arguments) <= most:
        reader.fail(f"{function} takes {fewest} argument{'s or more' if most > 1 else ''}", place=start)
    return _checked(reader, Call(function=cast(Function, function), arguments=tuple(arguments)))


def _operation(reader: Reader, sign: Arithmetic, left: Expression, right: Expression) -> Expression:
    operation = Operation(sign=sign, left=_value_only(reader, left), right=_value_only(reader, right))
    return _checked(reader, operation)


def _value_only(reader: Reader, node: Expression) -> Expression:
    if is_condition(node):
        reader.fail("a condition stands where a value belongs")
    return node


def _condition_only(reader: Reader, node: Expression) -> Expression:
    if not is_condition(node):
        reader.fail("a value stands where a condition belongs", hint="compare it: frequency >= 27.5 GHz")
    return node


def _checked(reader: Reader, node: Expression) -> Expression:
    if expression_depth(node) > MAX_DEPTH:
        reader.fail(f"nested deeper than {MAX_DEPTH} levels", hint="name parts as declared values")
    return node
