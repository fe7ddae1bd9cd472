"""Factors in headers: "I (x20 A)", "Power x10 (mW)", "EVM [10^-3]", "(×1e-3 V)", "P (dBm/10)".

A factor says by what readings are multiplied to have their unit only where it stands as a power of ten in front of that
unit, as part of it: a column of V/(10⁻³ V) holds millivolts (the SI Brochure, 9th edition, 5.4.1: a value is the number
times the unit). "x20 A", "x10 (mW)" and "/1000" may tell what was done to the readings, or what is still to be done;
that is asked.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

_POWER = (
    r"(?:1[eE]\s?(?P<e>[+\-]?\d{1,2})|10\s?(?:\^|\*\*)\s?\(?(?P<p>[+\-]?\d{1,2})\)?|"
    r"10(?P<s>[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+))"
)
_OF_UNIT = re.compile(rf"^(?:[x×*·]\s*)?{_POWER}\s*[·*× ]?\s*(?P<unit>[^\d\s].*)?$")
_TIMES = re.compile(
    r"(?<![\w.])[x×*]\s?(?:\d+(?:[.,]\d+)?(?:[eE][+\-]?\d+)?|10\^[+\-]?\d+)(?=$|[\s)\]/])"
    r"(?P<unit>\s*[^\s\d()\[\]/][^\s()\[\]]*)?"
)
_AFTER = re.compile(r"(?<![\d\s:])\s?[/*]\s?(?:10+|10\^[+\-]?\d+|1[eE][+\-]?\d+)\s*(?=[)\]]|$)")
_RAISED = str.maketrans("⁺⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "+-0123456789")


@dataclass(frozen=True, slots=True)
class ScaleText:
    """A factor as written; ``factor`` is what readings are certainly multiplied by, None where that has to be asked."""

    text: str
    factor: float | None = None

    @property
    def figure(self) -> str:
        """The number that is written, for a remedy."""
        found = re.search(r"10\^[+\-]?\d+|\d+(?:[.,]\d+)?(?:[eE][+\-]?\d+)?", self.text)
        return found[0].replace("10^", "1e").replace(",", ".") if found else "N"


def of_unit(inside: str) -> tuple[str, ScaleText] | None:
    """Take "10^-3 V" in brackets apart: the unit ("1" where none is written) and the factor; None for anything else."""
    found = _OF_UNIT.match(inside.strip().replace("−", "-"))
    if found is None:
        return None
    power = int(found["e"] or found["p"] or found["s"].translate(_RAISED))
    return (found["unit"] or "").strip(), ScaleText(inside.strip(), float(f"1e{power}"))


def without_factor(text: str) -> tuple[str, ScaleText | None]:
    """Cut a factor out of a header whose direction is not certain: "x20 A" leaves "A"; None where there is none."""
    found = _TIMES.search(text)
    if found is not None:
        rest = f"{text[: found.start()]}{(found['unit'] or '').strip()}{text[found.end() :]}"
        return _tidy(rest), ScaleText(found[0].strip())
    found = _AFTER.search(text)
    if found is not None:
        return _tidy(text[: found.start()] + text[found.end() :]), ScaleText(found[0].strip())
    return text, None


def _tidy(text: str) -> str:
    return " ".join(re.sub(r"[(\[]\s*[)\]]", " ", text).split())
