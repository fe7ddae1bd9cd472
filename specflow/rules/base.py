"""What a rule is: a function that looks at the facts and yields what it found, and a docstring that explains it.

The docstring has one form, which a test holds; the catalogue, the terminal and the reports show the same text::

    \"""One line that says what is reported.

    Why: what it costs to leave it.
    Fails: an example that the rule reports.
    Passes: an example that it does not.
    Do: what the person can do.
    \"""
"""

from __future__ import annotations

import inspect
import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass

from specflow.model.finding import Finding, RuleDescription, Severity
from specflow.model.origin import Origin
from specflow.rules.facts import Facts

_PARTS = ("Why", "Fails", "Passes", "Do")
_PART = re.compile(rf"^({'|'.join(_PARTS)}): ", re.MULTILINE)


@dataclass(frozen=True, slots=True)
class Found:
    """One thing that a rule found; what is the same for every finding of the rule is left to the rule.

    ``remedy`` and ``kind`` (of the subject) stand in for those of the rule where they are known more exactly.
    """

    subject: str
    message: str
    remedy: str = ""
    origin: Origin | None = None
    related: tuple[str, ...] = ()
    kind: str = ""


Check = Callable[[Facts], Iterable[Found]]


@dataclass(frozen=True, slots=True)
class Rule:
    """A rule with its explanation. ``severity`` is the default; a project may set another or switch it off."""

    description: RuleDescription
    check: Check

    @classmethod
    def of(cls, check: Check, noun: str, severity: Severity) -> Rule:
        """Make a rule of a function, called as that is. ValueError when its docstring is not in form."""
        code = check.__name__.replace("_", "-")
        title, parts = read_docstring(code, inspect.getdoc(check) or "")
        description = RuleDescription(
            code=code,
            title=title,
            severity=severity,
            noun=noun,
            why=parts["Why"],
            fails=parts["Fails"],
            passes=parts["Passes"],
            remedy=parts["Do"],
        )
        return cls(description, check)

    @property
    def code(self) -> str:
        """The name of the rule, as policies and dispositions write it."""
        return self.description.code

    def finding(self, found: Found, severity: Severity) -> Finding:
        """Return what was found as a finding."""
        return Finding(
            rule=self.code,
            severity=severity,
            subject=found.subject,
            subject_kind=found.kind or self.description.noun,
            message=found.message,
            why=self.description.why,
            remedy=found.remedy or self.description.remedy,
            origin=found.origin,
            related=found.related,
        )


def read_docstring(code: str, text: str) -> tuple[str, dict[str, str]]:
    """Return the title and the parts of a docstring. ValueError when a part is missing, twice or out of order."""
    head, *rest = _PART.split(text)
    names, bodies = rest[::2], rest[1::2]
    if tuple(names) != _PARTS:
        raise ValueError(
            f"the rule {code} explains {', '.join(names) or 'nothing'}; needed are {', '.join(_PARTS)}"
        )
    title = head.strip()
    if not title or "\n" in title or not title.endswith("."):
        raise ValueError(f"the rule {code} needs a title of one line that ends in a full stop")
    return title, {name: _sentence(body) for name, body in zip(names, bodies, strict=True)}


def _sentence(text: str) -> str:
    words = " ".join(text.split())
    return words[:1].upper() + words[1:]
