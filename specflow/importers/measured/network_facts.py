"""What the comments of a network file state: VAR name=value, key: value, and sentences with temperature or power.

Nothing is believed beyond what is written: a temperature does not say whose it is, and a sign that may be a dash is
left to the person.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from specflow.conditions import known_dimension
from specflow.importers.measured.day import read_day
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.header_text import read_header
from specflow.importers.measured.names import canonical
from specflow.importers.measured.result import Question
from specflow.importers.readers.touchstone_network import Comment

_PAIR = re.compile(r"^\s*(?:VAR\s+)?(?P<key>[A-Za-z][^:=]{0,58}?)\s*[:=]\s*(?P<value>.+)$", re.DOTALL)
_ASSIGNED = re.compile(r"([A-Za-z_]\w*)\s*=\s*([+-]?\d+(?:\.\d+)?\s*[A-Za-zµΩ°%]+)")
_TEMPERATURE = re.compile(
    r"(?P<sign>[+\-−–]?)(?P<gap>\s*)(?P<digits>\d+(?:\.\d+)?)\s*"
    r"(?:°\s*C\b|℃|deg(?:ree)?s?\.?\s*C(?:elsius)?\b|(?<=\d)\s?C\b)",
    re.IGNORECASE,
)
_TEMPERATURE_WORD = re.compile(r"\btemp(?:erature)?s?\b\s*[:=@]?\s*$", re.IGNORECASE)
_POWER = re.compile(
    r"(?:^\s*|[,;:]\s*|\b(?P<words>(?:input|source|drive|stimulus|port|rf)\s+|p_?)(?=power|level|in\b))"
    r"(?:power|level|in)\b\s*[:=@]?\s*(?P<value>[+\-−]?\s*\d+(?:\.\d+)?\s*dBm)\b",
    re.IGNORECASE,
)
_INPUT = re.compile(r"input|source|drive|stimulus|port|^p_?$", re.IGNORECASE)
#: What was done to the numbers before they came here. It changes none of them here, and a reviewer asks for it.
_TREATMENT = re.compile(
    r"\bde-?embed|\bembed(?:ded|ding)\b|\bfixture|\bport[ -]ext|\bgat(?:ed|ing)\b|\bsmooth|\brenormali[sz]"
    r"|\btime[ -]domain|\bcal(?:ibrat\w+)?\b|\bif[ -]?b(?:w|andwidth)\b|\baverag|\breference plane",
    re.IGNORECASE,
)
#: What the reader looks at itself: names of ports, headers of columns. Neither is a condition.
_NOT_STATED = ("frequency", "port")
_OF_THE_READER = re.compile(r"\bport\s*[\[<(]?\s*\d|[SYZGH]\d\d\b.*[SYZGH]\d\d\b", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class CommentFacts:
    """Facts by line, what is asked about them, and what says nothing that is known."""

    facts: tuple[Fact, ...]
    questions: tuple[Question, ...]
    unused: tuple[str, ...]


def comment_facts(comments: Sequence[Comment]) -> CommentFacts:
    """Read what comments state. Of the same thing said twice the first stands."""
    facts: list[Fact] = []
    questions: list[Question] = []
    unused: list[str] = []
    for comment in comments:
        found = list(_sentences(comment, questions))
        found += _several(comment)
        pair = _PAIR.match(comment.text)
        if pair and not found and not _OF_THE_READER.search(comment.text):
            fact = _of_pair(pair["key"], pair["value"], comment.line)
            if fact is None:
                unused.append(f"line {comment.line}: {comment.text[:80]}")
            else:
                found.append(fact)
        elif not found and _TREATMENT.search(comment.text):
            unused.append(f"line {comment.line}: {comment.text[:80]}")
        known = {(one.key.casefold(), one.value) for one in facts}
        facts += [one for one in found if (one.key.casefold(), one.value) not in known]
    return CommentFacts(tuple(facts), tuple(questions), tuple(unused))


def _several(comment: Comment) -> list[Fact]:
    """What a comment states in several assignments: Vdd = 3.3 V, Idd = 60 mA; one alone is a pair like any other."""
    assigned = _ASSIGNED.findall(comment.text)
    if len(assigned) < 2:
        return []
    facts = (_of_pair(key, value, comment.line) for key, value in assigned)
    return [fact for fact in facts if fact is not None]


def _of_pair(key: str, value: str, line: int) -> Fact | None:
    """The fact of ``key: value``; None where the key is none that is known, or its value has no one meaning."""
    key, value = " ".join(key.split()), " ".join(value.split())
    name = canonical(key)
    if key.casefold().replace(" ", "") in ("date/time", "measdate", "datetime", "measurementdate"):
        name = "date"
    if not name or name in _NOT_STATED:
        return None
    dimension = known_dimension(name)
    if dimension and dimension.unit and not re.search(r"[A-Za-zµΩ°%]\s*$", f"{value}{read_header(key).unit}"):
        return None  # VAR V_in= 0.8387: a bare number of some unit
    if name == "date":
        day = read_day(value)
        return Fact("date", day.isoformat(), f"line {line}", line) if day else None
    return Fact(key, value, f"line {line}", line)


def _sentences(comment: Comment, questions: list[Question]) -> Iterator[Fact]:
    """Temperature and power, wherever they stand in a comment."""
    cell, text = f"line {comment.line}", comment.text
    power = _POWER.search(text)
    if power:
        key = "input power" if _INPUT.search((power["words"] or "").strip()) else "power level"
        value = power["value"].replace("−", "-").replace(" ", "").replace("dBm", " dBm")
        yield Fact(key, value, cell, comment.line)
    for match in _TEMPERATURE.finditer(text):
        before = text[: match.start()].rstrip()
        unit_is_bare = re.fullmatch(r".*\d\s?C", match.group(), re.IGNORECASE | re.DOTALL) is not None
        if unit_is_bare and not _TEMPERATURE_WORD.search(before):
            continue
        sign = match["sign"].replace("−", "-").replace("–", "-")
        if sign == "-" and match["gap"] and before and before[-1] not in "=:@(,;":
            what = f"{text[:80]!r}: is the dash before {match['digits']} °C a minus?"
            questions.append(
                Question("temperature", cell, what, "--state temperature_ambient='... °C' (or case ...)")
            )
            continue
        yield Fact("temperature", f"{sign.replace('+', '')}{match['digits']} °C", cell, comment.line)
