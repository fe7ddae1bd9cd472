"""The grammar of what belongs to a limit as a whole: TBR, rounding, test tolerance."""

from __future__ import annotations

import re
from typing import Literal

from specflow.limits.draft import Draft
from specflow.limits.shape_grammar import read_amount
from specflow.model.expression import Number
from specflow.model.limit import LimitState, Rounding, TestTolerance

_COMMA_BEFORE_TBR = re.compile(r", *(?=\(?TB[RC]\b)", re.IGNORECASE)
_TENTATIVE = re.compile(r"\[( *[-+±<>=≤≥]* *\d[\d., ]*)\]")


def read_tentative(draft: Draft) -> None:
    """Square brackets around a number mark it as tentative (3GPP drafting): they count as TBR."""
    if not _TENTATIVE.search(draft.reader.text):
        return
    draft.reader.text = _TENTATIVE.sub(r" \1 ", draft.reader.text)
    draft.reader.take()
    draft.reader.place = len(draft.reader.text) - len(draft.reader.text.lstrip())
    draft.state = LimitState.TBR
    draft.say("the number in square brackets is tentative: TBR")


def take_tbr(draft: Draft) -> bool:
    reader = draft.reader
    place = reader.place
    reader.take_pattern(_COMMA_BEFORE_TBR)
    if reader.take("(TBR)", "(tbr)", "(TBC)") is None and reader.take_words("TBR", "TBC") is None:
        reader.place = place
        return False
    if draft.inner:
        reader.fail("TBR belongs to the whole limit, not inside", place=place)
    draft.state = LimitState.TBR
    return True


def take_whole(draft: Draft) -> bool:
    """Take what belongs to the limit as a whole: TBR, rounding, test tolerance."""
    reader = draft.reader
    place = reader.place
    if take_tbr(draft):
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
