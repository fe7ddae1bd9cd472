"""Documents as plain data and back: the one place that knows how a document is written down.

A *payload* is a JSON-able dict of all fields of a document (defaults too: a default that changes later must not
change what was stored) with the key ``format``, the integer version of the exchange format. When a document class
changes shape, ``FORMAT`` grows by one and ``UPGRADES`` gains one small dict-to-dict function; nothing else reads
old payloads. Digests are taken over canonical bytes: UTF-8 JSON, keys sorted, no blanks, floats in their shortest
spelling that reads back the same.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable, Mapping
from typing import Any

from pydantic import ValidationError

from specflow.errors import DocumentError
from specflow.model.base import Document
from specflow.model.nouns import NOUN_BY_NAME

FORMAT = 1

Payload = dict[str, Any]
Upgrade = Callable[[str, Payload], Payload]

#: Format version -> the function that makes a payload of the next version (noun, payload of that version).
UPGRADES: Mapping[int, Upgrade] = {}

_CURRENT = f'{{"format":{FORMAT},'


def payload(document: Document) -> Payload:
    """Return all fields of a document as JSON-able data, with its ``format``."""
    return {"format": FORMAT, **_clean(document.model_dump(mode="json"))}


def payload_text(document: Document) -> str:
    """Return the payload as JSON text, ``format`` first: the spelling in which documents are stored.

    The same document always gives the same text, so texts may be compared to see whether anything changed.
    """
    text = document.model_dump_json()
    if "\\u0000" in text or "-0.0" in text:  # rare, and walking every document costs more than looking
        text = _compact(_clean(json.loads(text)))
    return _CURRENT + text[1:]


def read_payload(noun: str, data: Mapping[str, Any]) -> Document:
    """Return the document of a payload, whatever version of the format it has.

    Raises DocumentError that names every field that is wrong, or a format newer than this program knows.
    """
    fields = upgraded(noun, dict(data))
    del fields["format"]
    try:
        return _document_class(noun).model_validate(_clean(fields))
    except ValidationError as error:
        raise _document_error(noun, fields, error) from None


def read_text(noun: str, text: str) -> Document:
    """Return the document of a stored text (see ``payload_text``); text of the current format is read fastest."""
    if text.startswith(_CURRENT):
        try:
            return _document_class(noun).model_validate_json("{" + text[len(_CURRENT) :])
        except ValidationError:
            pass  # the slow way says what is wrong, in words
    return read_payload(noun, load_payload(noun, text))


def load_payload(noun: str, text: str) -> Payload:
    """Return the JSON object that ``text`` holds. Raises DocumentError when it is something else, or holds NaN."""
    try:
        data = json.loads(text, parse_constant=_refuse_constant)
    except ValueError as error:
        raise DocumentError(f"not a JSON document ({error})", where=noun) from None
    if not isinstance(data, dict):
        raise DocumentError("not a JSON object", where=noun)
    return data


def upgraded(
    noun: str, data: Payload, *, upgrades: Mapping[int, Upgrade] = UPGRADES, current: int = FORMAT
) -> Payload:
    """Return the payload in the ``current`` format, by one upgrade step a version."""
    version = data.get("format")
    if not isinstance(version, int) or isinstance(version, bool) or version < 1:
        raise DocumentError(
            "the payload does not say its format", where=noun, hint="it needs a whole number, format"
        )
    if version > current:
        raise DocumentError(
            f"written in format {version}; this program reads up to {current}",
            where=noun,
            hint="update specflow",
        )
    for step in range(version, current):
        data = {**upgrades[step](noun, data), "format": step + 1}
    return data


def canonical_bytes(data: Any) -> bytes:
    """Return UTF-8 JSON with sorted keys, no blanks and shortest floats; a Document stands for its payload.

    Raises DocumentError for NaN, infinities and for what JSON cannot hold.
    """
    if isinstance(data, Document):
        data = payload(data)
    try:
        return json.dumps(
            data,
            ensure_ascii=False,
            sort_keys=True,
            separators=(",", ":"),
            allow_nan=False,
            default=_as_payload,
        ).encode()
    except (ValueError, TypeError) as error:
        raise DocumentError(f"cannot be written as canonical JSON: {error}") from None


def digest(data: Any) -> str:
    """Return the SHA-256 of the canonical bytes, as hexadecimal text."""
    return hashlib.sha256(canonical_bytes(data)).hexdigest()


def _clean(value: Any) -> Any:
    """Strip NUL from texts and turn −0 into 0, all the way down."""
    if isinstance(value, str):
        return value.replace("\0", "") if "\0" in value else value
    if isinstance(value, float):
        return value + 0.0
    if isinstance(value, dict):
        return {_clean(key): _clean(part) for key, part in value.items()}
    if isinstance(value, list | tuple):
        return [_clean(part) for part in value]
    return value


def _compact(data: Any) -> str:
    return json.dumps(data, ensure_ascii=False, separators=(",", ":"), allow_nan=False)


def _as_payload(value: object) -> Payload:
    if isinstance(value, Document):
        return payload(value)
    raise TypeError(f"{type(value).__name__} is not JSON")


def _refuse_constant(name: str) -> float:
    raise ValueError(f"{name} is not a number that may be stored")


def _document_class(noun: str) -> type[Document]:
    try:
        return NOUN_BY_NAME[noun].document
    except KeyError:
        raise DocumentError(
            f"{noun!r} is no noun of a project", hint=f"one of {', '.join(NOUN_BY_NAME)}"
        ) from None


def _document_error(noun: str, fields: Payload, error: ValidationError) -> DocumentError:
    faults = "; ".join(
        f"{'.'.join(str(part) for part in fault['loc']) or 'document'}: {fault['msg']}"
        for fault in error.errors()
    )
    code = fields.get(NOUN_BY_NAME[noun].id_field)
    return DocumentError(
        faults, where=f"{NOUN_BY_NAME[noun].title} {code}" if code else NOUN_BY_NAME[noun].title
    )
