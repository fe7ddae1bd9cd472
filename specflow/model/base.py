"""The ground every document stands on: frozen, strict, identified by a human code."""

from __future__ import annotations

import unicodedata
from functools import lru_cache
from typing import Annotated

from pydantic import AfterValidator, BaseModel, ConfigDict

MAX_CODE_LENGTH = 80


@lru_cache(maxsize=1 << 16)  # the codes of a project come again in every document that names them
def clean_code(text: str) -> str:
    """Return a code as it is stored: NFC, outer blanks removed.

    Raises ValueError for an empty code, one with control characters or line breaks, or one that is too long.
    """
    code = unicodedata.normalize("NFC", text).strip()
    if not code:
        raise ValueError("an id may not be empty")
    # Most codes are plainly printable; looking at every character of every code takes half the time of loading.
    if not code.isprintable() and any(
        unicodedata.category(character) in ("Cc", "Cf", "Zl", "Zp") for character in code
    ):
        raise ValueError(f"the id {code!r} holds a control character or a line break")
    if len(code) > MAX_CODE_LENGTH:
        raise ValueError(f"the id {code[:20]}... is longer than {MAX_CODE_LENGTH} characters")
    return code


@lru_cache(maxsize=1 << 16)  # asked for at every look-up, by every part of the program
def code_key(code: str) -> str:
    """Return what two codes are compared by: they are the same when they differ in case only."""
    return unicodedata.normalize("NFC", code).strip().casefold()


Code = Annotated[str, AfterValidator(clean_code)]


class Document(BaseModel):
    """A frozen record of the model: what rules and reports read, what is exchanged and what a baseline holds."""

    # Of a hundred kinds of document a command needs a few: each builds its validator when it is first used.
    model_config = ConfigDict(
        frozen=True, extra="forbid", str_strip_whitespace=True, allow_inf_nan=False, defer_build=True
    )
