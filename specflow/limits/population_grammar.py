"""The grammar of statistics over a population: percentiles, worst, means, tolerance bounds."""

from __future__ import annotations

from specflow.limits.draft import Draft
from specflow.limits.expression_grammar import read_condition, read_sum
from specflow.limits.expression_shape import is_condition
from specflow.model.expression import Number
from specflow.model.limit import LimitNode, Mean, Percentile, Population, Statistic, ToleranceBound, Worst

_HINT = "at 50 % of CDF over sphere, at 95/95 over item"


def read_statistic(draft: Draft) -> Statistic | None:
    """Read the statistic itself, None when no such word follows."""
    reader = draft.reader
    if reader.take_words("at") is not None:
        return _percentile_or_bound(draft)
    if reader.take_words("worst") is not None:
        return Worst()
    if reader.take_words("mean") is None:
        return None
    word = reader.take_words("of power", "of dB", "of squares", "of values")
    return Mean.model_validate({"of": word.removeprefix("of ")}) if word else Mean()


def _percentile_or_bound(draft: Draft) -> Statistic:
    reader = draft.reader
    place = reader.place
    first = reader.take_number()
    if first is None or not 0 <= float(first) <= 100:
        reader.fail("expected a percentage", hint=_HINT, place=place)
    if reader.take("/") is not None:
        second = reader.take_number()
        if second is None or not (0 < float(second) < 100 and 0 < float(first) < 100):
            reader.fail("expected the confidence after the '/'", hint="at 95/95 over item")
        return ToleranceBound(coverage=Number(text=first), confidence=Number(text=second))
    if not reader.sees("%"):
        reader.fail(
            "'at' is followed by a percentile, or by a value with its unit",
            hint=f"{_HINT}; conditions such as a frequency belong in the conditions set",
            place=place,
        )
    reader.take("%")
    reader.take_words("of the", "of")
    sense = reader.take_words("CDF", "CCDF")
    if sense is None:
        reader.fail("expected CDF or CCDF after the percentage", hint=_HINT)
    return Percentile(percent=Number(text=first), sense="CDF" if sense == "CDF" else "CCDF")


def read_population(draft: Draft, limit: LimitNode, statistic: Statistic) -> Population:
    """Read what the statistic runs over, and build the limit."""
    reader = draft.reader
    of = read_sum(reader) if reader.take_words("of") is not None else None
    over: list[str] = []
    if reader.take_words("over") is not None:
        over.append(_name(draft))
        while reader.take(",") is not None:
            over.append(_name(draft))
    where = None
    if reader.take_words("where") is not None:
        place = reader.place
        where = read_condition(reader)
        if not is_condition(where):
            reader.fail("'where' needs a condition", hint="where frequency >= 28 GHz", place=place)
    least = _least(draft) if reader.take_words("from at least") is not None else None
    return Population(limit=limit, statistic=statistic, of=of, over=tuple(over), where=where, least=least)


def _name(draft: Draft) -> str:
    name = draft.reader.take_name()
    if name is None:
        draft.reader.fail("expected a name after 'over'", hint="over sphere")
    return name


def _least(draft: Draft) -> int:
    number = draft.reader.take_number()
    if number is None or not number.isdigit() or int(number) < 1:
        draft.reader.fail("expected a number of values after 'from at least'", hint="from at least 20")
    return int(number)
