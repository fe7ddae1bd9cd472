"""Stdin, stdout and stderr as a command may find them: closed, full, or of an encoding without our signs."""

from __future__ import annotations

import codecs
import os
import re
import sys
from io import TextIOWrapper
from pathlib import Path
from typing import Any

#: What is written for a sign that the terminal cannot show: none may turn into another meaning, as "?" would.
SPELT_OUT = {
    "–": "-", "—": "-", "−": "-", "≥": ">=", "≤": "<=", "±": "+/-", "·": "|", "→": "->", "×": "x", "…": "...",
    "°": "deg", "°C": "degC", "µ": "u", "μ": "u", "Ω": "ohm", "Δ": "delta ", "σ": "sigma", "√": "sqrt ",
    "²": "^2", "³": "^3", "∞": "inf", "≈": "~", "“": '"', "”": '"', "‘": "'", "’": "'", "\u00a0": " ", "\u202f": " ",
}  # fmt: skip
HANDLER = "specflow-spelt-out"
#: Signs that steer a terminal, or turn the order of the text about, instead of standing in it.
_STEERING = re.compile("[\x00-\x08\x0b-\x1f\x7f-\x9f\u202a-\u202e\u2066-\u2069]")


def prepare_streams() -> None:
    """Make all three streams usable, whatever the process was started with.

    One that is closed is opened on the null device: else the next file that is opened takes its number, and Python
    sends what is meant for it elsewhere. What an encoding does not have is spelt out.
    """
    codecs.register_error(HANDLER, _spell_out)
    if sys.stdin is None:
        sys.stdin = _null("r")
    if sys.stdout is None:
        sys.stdout = _null("w")
    if sys.stderr is None:
        sys.stderr = _null("w")
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, TextIOWrapper):
            stream.reconfigure(errors=HANDLER)


def harmless(text: str) -> str:
    """Spell out what steers a terminal (escape sequences, carriage returns, marks that turn the reading direction).

    Cells, file names and titles come from anywhere: none of them may colour, clear or rewrite what is on the screen.
    """
    return text if text.isprintable() else _STEERING.sub(lambda sign: ascii(sign[0])[1:-1], text)


def fitting(text: str) -> str:
    """Return the text as stdout will show it, so that columns of it are of the right width."""
    text = harmless(text)
    if text.isascii():
        return text
    encoding = _encoding()
    return text if encoding.startswith("utf") else _as_shown(text, encoding)


def is_unicode() -> bool:
    """Whether stdout has every sign."""
    return _encoding().startswith("utf")


def drop_output() -> None:
    """Send what is still to come for stdout to nowhere: its reader has gone (a pager that was closed)."""
    null = os.open(os.devnull, os.O_WRONLY)
    os.dup2(null, sys.stdout.fileno())
    os.close(null)


def _encoding() -> str:
    return str(getattr(sys.stdout, "encoding", None) or "utf-8").casefold()


def _as_shown(text: str, encoding: str) -> str:
    return text.encode(encoding, HANDLER).decode(encoding, "replace")


def _null(mode: str) -> Any:
    return Path(os.devnull).open(mode, encoding="utf-8")


def _spell_out(error: UnicodeError) -> tuple[str | bytes, int]:
    """Spell out one sign; a byte of a file name that is no text comes out as the byte that it was."""
    if not isinstance(error, UnicodeEncodeError):
        raise error
    sign, place = error.object[error.start], error.start + 1
    if "\udc80" <= sign <= "\udcff":
        return bytes([ord(sign) - 0xDC00]), place
    if error.object[error.start : place + 1] == "°C":
        return SPELT_OUT["°C"], place + 1
    return SPELT_OUT.get(sign) or sign.encode("ascii", "backslashreplace").decode("ascii"), place
