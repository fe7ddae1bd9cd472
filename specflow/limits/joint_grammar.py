"""The grammar of what joins the clauses of a limit: or, and, commas, and typical values that are left out."""

from __future__ import annotations

import re
from collections.abc import Sequence

from specflow.limits.draft import Bare, Draft, Typical
from specflow.limits.tree import side_of
from specflow.model.limit import Cases, LimitNode, Side, Stringency

_LOOSER = ("looser", "less stringent", "less strict", "more relaxed")
_STRICTER = ("stricter", "more stringent", "tighter")
_LOWER = ("lower", "smaller", "less")
_HIGHER = ("higher", "greater", "larger")
_SIGN = r"[<>≤≥⩽⩾≮≯]"
_SIDE_WORD = r"(?:max|min|typ|nom)(?:imum|ical|inal)?\b(?! *\()"
_NEXT_BOUND = re.compile(
    rf"(?:[,;/]|&&?) *(?:{_SIGN}|{_SIDE_WORD})"
    # A comma between digits may be a decimal comma.
    rf"|(?:[,;] +|(?<!\d)[,;]|/ *|&&? *)[-+–]?[\d.,]+ *[^\s\d,;/()]{{0,8}} *{_SIDE_WORD}",
    re.IGNORECASE,
)
#: Between values at several offsets, and around a typical value, a bare value may follow.
_SEPARATOR = re.compile(r"[,;/](?! *whichever)", re.IGNORECASE)


def take_joint(draft: Draft, before: LimitNode | Bare | Typical) -> str | None:
    """Take 'or' or 'and'; a comma (outside brackets a semicolon too) before another bound means 'and'.

    Behind a value without a direction a comma joins nothing: in "45 dBm, 50 dBm max" the first may be the nominal.
    """
    reader = draft.reader
    if isinstance(before, Bare):
        return reader.take_words("or", "and")
    if draft.inner and reader.sees(";"):
        return None
    if _NEXT_BOUND.match(reader.text, reader.place):
        reader.take(",", ";", "/", "&&", "&")
        return "and"
    listed = isinstance(before, Cases | Typical) and _SEPARATOR.match(reader.text, reader.place)
    if listed:
        reader.take(",", ";", "/")
        return "and"
    return reader.take_words("or", "and")


def without_typical(draft: Draft, clauses: Sequence[LimitNode | Bare | Typical]) -> list[LimitNode | Bare]:
    """Leave typical values out, and say so; a limit that is nothing else is refused."""
    for clause in clauses:
        if isinstance(clause, Typical):
            draft.say(f"{clause.written} is no limit and is left out")
    kept = [clause for clause in clauses if not isinstance(clause, Typical)]
    if not kept and isinstance(clauses[0], Typical):
        draft.reader.fail(
            f"{clauses[0].written}: a typical or nominal value is no limit",
            hint="write the value that must be kept; the typical one belongs in the note",
            place=clauses[0].place,
        )
    return kept


def read_rule(draft: Draft, joint: str, members: tuple[LimitNode, ...]) -> Stringency:
    reader = draft.reader
    place = reader.place
    comma = reader.take(",")
    if reader.take_words("whichever is the", "whichever is", "whichever") is None:
        if comma is not None:
            reader.fail("expected 'whichever is looser' or 'whichever is stricter' after the comma")
        return Stringency.LOOSER if joint == "or" else Stringency.STRICTER
    if reader.take_words(*_LOOSER) is not None:
        return Stringency.LOOSER
    if reader.take_words(*_STRICTER) is not None:
        return Stringency.STRICTER
    word = reader.take_words(*_LOWER, *_HIGHER)
    sides = {side_of(member) for member in members}
    if word is None or len(sides) != 1 or None in sides:
        reader.fail(
            "which of the alternatives governs?", hint="whichever is looser, or stricter", place=place
        )
    looser = (word in _HIGHER) == (sides == {Side.UPPER})
    return Stringency.LOOSER if looser else Stringency.STRICTER


_TYPICAL_REMARK = re.compile(r"\([^()]{0,40}\b(?:typ|typical|nom|nominal)\b[^()]{0,40}\)", re.IGNORECASE)


def take_typical_remark(draft: Draft) -> None:
    """Take "(2.0 dB typ)" behind a limit."""
    remark = draft.reader.take_pattern(_TYPICAL_REMARK)
    if remark is not None:
        draft.say(f"{remark[1:-1].strip()} is no limit and is left out")
