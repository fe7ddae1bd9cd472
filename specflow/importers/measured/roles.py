"""What the words of a header say about the role of a column, before anybody asks the dictionary of parameters."""

from __future__ import annotations

import re

from specflow.importers.measured.header_text import HeaderText
from specflow.importers.measured.result import Role

_EXACT: dict[Role, str] = {
    Role.ITEM: "item | item id | item no | dut | dut id | dut sn | uut | uut sn | device | device id | serial | serial no | "
    "serial number | serial nr | s/n | sn | specimen | specimen id | sample | sample id | unit | unit id | unit no | "
    "unit sn | eut | board | board sn | module sn | item serial | hardware item",
    Role.DATE: "date | test date | measurement date | measured on | date of test | timestamp | time stamp | date/time | "
    "datetime | date time | performed on | date measured",
    Role.INDEX: "# | no | no. | nr | nr. | run | run no | run # | index | idx | row | point | pt | point no | meas no | "
    "measurement no | seq | sequence | line | record | record no | test no | meas # | test # | step",
    Role.STATED_VERDICT: "pass/fail | pass / fail | p/f | verdict | result | pass | fail | ok | ok? | status | compliant | "
    "compliance | go/no go | judgement | conclusion | pass or fail | assessment",
    Role.REMARK: "comment | comments | remark | remarks | note | notes | observation | observations | file | filename | "
    "file name | plot | screenshot | trace file | data file | description | instrument | equipment | analyser",
    Role.REQUIREMENT: "requirement | requirement id | req | req id | req. | req no | requirement no | spec id | "
    "specification id | rid",
}  # fmt: skip


def _plain(text: str) -> str:
    return re.sub(r"[\s_.]+", "", text.casefold())


_ROLES = {_plain(word): role for role, words in _EXACT.items() for word in words.split(" | ")}
_LIMIT_WORDS = frozenset(
    ["limit", "limits", "spec", "specification", "lsl", "usl", "threshold", "requirement", "target", "goal", "lower_limit"]
)
_MARGIN_WORDS = frozenset(["margin", "headroom"])
_UNCERTAINTY = re.compile(
    r"^(?:(?P<of>.*?)[\s_]*)(?:\b(?P<letter>[Uu])(?![a-z])|(?P<sign>±|\+/-)|\b(?P<word>(?:expanded |standard |meas\w*\.? )?unc(?:ert(?:ainty|\.)?|\.)?|"
    r"std\.? unc\w*|mu))\s*(?P<rest>(?:\(.*\))?\s*(?:of|for)?\s*(?P<of_after>.*))$",
    re.IGNORECASE,
)


def role_of_words(parts: HeaderText) -> tuple[Role, str] | None:
    """Return the role that the header's words say and the reason; None when they say none."""
    role = _ROLES.get(_plain(parts.name)) or _ROLES.get(_plain(parts.text))
    if role is not None and not parts.unit:
        return role, f"the header {parts.text!r} names a column of this kind"
    if role is Role.STATED_VERDICT:
        return None
    words = set(re.findall(r"[a-z]+", parts.name.casefold()))
    if words & _LIMIT_WORDS:
        return Role.STATED_LIMIT, "a limit as the source states it; limits are judged from the requirements"
    if words & _MARGIN_WORDS:
        return Role.STATED_LIMIT, "a margin as the source states it; margins are computed"
    if {"delta", "limit"} <= words:
        return Role.STATED_LIMIT, "a distance to a limit as the source states it"
    return None


def is_known(parts: HeaderText) -> bool:
    """Whether the words of a header name a role."""
    return role_of_words(parts) is not None or uncertainty_of(parts) is not None


def uncertainty_of(parts: HeaderText) -> tuple[str, bool, bool] | None:
    """Return (what the uncertainty is of, is it a standard one, is it a bare ±) for a header of uncertainties.

    "U (dB), k=2", "u(Gain)", "± dB", "Expanded uncertainty", "Gain uncertainty (dB)"; None for any other header.
    """
    name = parts.name or parts.text
    found = _UNCERTAINTY.match(name)
    if found is None or (found["letter"] and not _is_letter(found)):
        return None
    of = (found["of"] or "").strip(" ,;:-") or (found["of_after"] or "").strip(" ,;:-()")
    if not of and parts.bracketed:
        of = parts.bracketed[0]
    word = (found["word"] or "").casefold()
    standard = found["letter"] == "u" or "standard" in word or word.startswith("std")
    return of, standard, bool(found["sign"])


def _is_letter(found: re.Match[str]) -> bool:
    """A lone u or U, perhaps behind the name of a quantity; not the last letter of a word, nor U1."""
    return (
        not found["rest"].strip()
        or found["rest"].lstrip()[:1] == "("
        or found["rest"].startswith((" of", " for", "of ", "for "))
    )
