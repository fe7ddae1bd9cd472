"""Signs and phrases that say which side of a value is bounded, as engineers write them."""

from __future__ import annotations

from specflow.model.limit import Side

_LOWER, _UPPER = (Side.LOWER, False), (Side.UPPER, False)
_ABOVE, _BELOW = (Side.LOWER, True), (Side.UPPER, True)

#: Signs in front of a value: side, and whether equality is excluded. The longest come first.
COMPARED = {
    ">=": _LOWER, "≥": _LOWER, "=>": _LOWER, "⩾": _LOWER, "> =": _LOWER, "≮": _LOWER,
    "<=": _UPPER, "≤": _UPPER, "=<": _UPPER, "⩽": _UPPER, "< =": _UPPER, "≯": _UPPER,
    ">": _ABOVE, "<": _BELOW,
}  # fmt: skip

#: Words in front of a value. The longest of those that begin alike come first.
LED = {
    "at least": _LOWER,
    "not less than": _LOWER,
    "no less than": _LOWER,
    "not lower than": _LOWER,
    "no lower than": _LOWER,
    "not below": _LOWER,
    "a minimum of": _LOWER,
    "minimum of": _LOWER,
    "at most": _UPPER,
    "up to": _UPPER,
    "not more than": _UPPER,
    "no more than": _UPPER,
    "not greater than": _UPPER,
    "no greater than": _UPPER,
    "not higher than": _UPPER,
    "no higher than": _UPPER,
    "not to exceed": _UPPER,
    "shall not exceed": _UPPER,
    "must not exceed": _UPPER,
    "not exceeding": _UPPER,
    "not above": _UPPER,
    "a maximum of": _UPPER,
    "maximum of": _UPPER,
    "more than": _ABOVE,
    "greater than": _ABOVE,
    "higher than": _ABOVE,
    "in excess of": _ABOVE,
    "shall exceed": _ABOVE,
    "must exceed": _ABOVE,
    "exceeding": _ABOVE,
    "exceeds": _ABOVE,
    "above": _ABOVE,
    "less than": _BELOW,
    "lower than": _BELOW,
    "smaller than": _BELOW,
    "below": _BELOW,
    "under": _BELOW,
    "minimum": _LOWER,
    "maximum": _UPPER,
    "min": _LOWER,
    "max": _UPPER,
}

#: Words behind a value.
FOLLOWED = {
    "(minimum)": Side.LOWER,
    "(maximum)": Side.UPPER,
    "(min.)": Side.LOWER,
    "(max.)": Side.UPPER,
    "(min)": Side.LOWER,
    "(max)": Side.UPPER,
    "minimum": Side.LOWER,
    "maximum": Side.UPPER,
    "min.": Side.LOWER,
    "max.": Side.UPPER,
    "min": Side.LOWER,
    "max": Side.UPPER,
    "or more": Side.LOWER,
    "or higher": Side.LOWER,
    "or greater": Side.LOWER,
    "or above": Side.LOWER,
    "and above": Side.LOWER,
    "or less": Side.UPPER,
    "or lower": Side.UPPER,
    "or smaller": Side.UPPER,
    "or below": Side.UPPER,
    "and below": Side.UPPER,
}

#: What a sentence says before its bound.
OPENINGS = ("shall be", "must be", "should be", "will be", "is to be", "to be", "is")

#: Words that mark a value as typical or nominal: it tells, but limits nothing.
TYPICAL = ("(typical)", "(typ.)", "(typ)", "typically", "typical", "typ.", "typ")
NOMINAL = ("(nominal)", "(nom.)", "(nom)", "nominal", "nom.", "nom")
