"""What the words of a header say about the role of a column, before anybody asks the dictionary of parameters."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from specflow.importers.measured.header_text import HeaderText
from specflow.importers.measured.result import Role

_NAMES: dict[Role, tuple[str, ...]] = {
    Role.ITEM: (
        "item | item id | item no | item serial | hardware item | dut | dut id | dut sn | uut | uut sn | device",
        "device id | serial | serial no | serial number | serial nr | s/n | sn | specimen | specimen id | sample",
        "sample id | unit | unit id | unit no | unit sn | eut | board | board sn | module sn",
    ),
    Role.DATE: (
        "date | test date | measurement date | measured on | date of test | timestamp | time stamp | date/time",
        "datetime | date time | performed on | date measured",
    ),
    Role.INDEX: (
        "# | no | no. | nr | nr. | run | run no | run # | index | idx | row | point | pt | point no | meas no",
        "measurement no | seq | sequence | line | record | record no | test no | meas # | test # | step | page",
        "peak # | peak no | peak number | spur # | spur no | marker #",
    ),
    Role.STATED_VERDICT: (
        "pass/fail | pass / fail | p/f | verdict | result | pass | fail | ok | ok? | status | compliant",
        "compliance | go/no go | judgement | conclusion | pass or fail | assessment",
    ),
    Role.REMARK: (
        "comment | comments | remark | remarks | note | notes | observation | observations | file | filename",
        "file name | plot | screenshot | trace file | data file | description | instrument | equipment | analyser",
    ),
    Role.REQUIREMENT: (
        "requirement | requirement id | req | req id | req. | req no | requirement no | spec id",
        "specification id | rid",
    ),
}


def _plain(text: str) -> str:
    return re.sub(r"[\s_.]+", "", text.casefold())


_ROLES = {
    _plain(word): role for role, lines in _NAMES.items() for line in lines for word in line.split(" | ")
}
_LIMIT = re.compile(r"\b(?:limits?|spec|specification|lsl|usl|threshold|requirement|target|goal)\b")
_MARGIN = re.compile(r"\b(?:margin|headroom)\b")
_WORDS = r"(?:expanded |standard |meas\w*\.? )?unc(?:ert(?:ainty)?)?|std\.? unc\w*"
_UNCERTAINTY = re.compile(
    rf"^(?:(?P<of>.*?)[\s_]*)(?:\b(?P<letter>u)|(?P<sign>±|\+/-)|\b(?P<word>{_WORDS}))\b"
    r"\s*(?:(?:of|for)\s+|\(\s*)?(?P<of_after>[^()]*)\)?$",
    re.IGNORECASE,
)
_BARE_SIGN = re.compile(r"^(?P<of>.*?)\s*(?:±|\+/-)\s*$")


@dataclass(frozen=True, slots=True)
class UncertaintyWords:
    """What a header says of an uncertainty: of which quantity ("" unsaid), a standard one, or a bare ± sign."""

    of: str
    is_standard: bool
    is_bare: bool


@lru_cache(maxsize=4096)
def role_of_words(parts: HeaderText) -> tuple[Role, str] | None:
    """Return the role that the header's words say and the reason; None when they say none."""
    whole = _ROLES.get(_plain(parts.text))  # P/F is a verdict, not a P in farads
    role = whole or _ROLES.get(_plain(parts.name))
    if role is not None and (whole is not None or not parts.unit):
        return role, f"the header {parts.text!r} names a column of this kind"
    if role is Role.STATED_VERDICT:
        return None
    words = parts.name.casefold().replace("_", " ")
    if _LIMIT.search(words):
        return Role.STATED_LIMIT, "a limit as the source states it; limits are judged from the requirements"
    if _MARGIN.search(words):
        return Role.STATED_LIMIT, "a margin as the source states it; margins are computed"
    return None


@lru_cache(maxsize=4096)
def uncertainty_of(parts: HeaderText) -> UncertaintyWords | None:
    """Return what a header says of an uncertainty; None for any other header.

    "U (dB), k=2", "u(Gain)", "± dB", "Expanded uncertainty", "Gain uncertainty (dB)", "U Gain (dB)".
    """
    name = parts.name or parts.text
    sign = _BARE_SIGN.match(name)
    if sign is not None:
        return UncertaintyWords(sign["of"].strip(" ,;:-."), False, True)
    found = _UNCERTAINTY.match(name)
    if found is None or (found["letter"] and found["of"] and found["of_after"]):
        return None
    of = found["of"].strip(" ,;:-.") or found["of_after"].strip(" ,;:-.")
    if not of and parts.bracketed:
        of = parts.bracketed[0]
    word = (found["word"] or "").casefold()
    standard = found["letter"] == "u" or "standard" in word or word.startswith("std")
    return UncertaintyWords(of, standard, False)
