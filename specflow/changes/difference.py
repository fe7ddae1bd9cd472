"""Which documents were added, edited or removed."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Collection, Iterable, Mapping, Sequence

from specflow.changes.fields import differing_fields, field_changes
from specflow.changes.meaning import is_meaning_changing
from specflow.errors import DocumentError
from specflow.exchange import payload_text
from specflow.model.base import Document, code_key
from specflow.model.change import Change
from specflow.model.nouns import NOUN_BY_DOCUMENT, NOUN_BY_NAME, NOUNS, Noun
from specflow.model.snapshot import Snapshot

Documents = Mapping[str, Mapping[str, Document]]


def diff(
    before: Snapshot | Documents,
    after: Sequence[Document],
    *,
    removals: Sequence[Document] = (),
    complete_nouns: Collection[str] = (),
) -> list[Change]:
    """Return what accepting ``after`` would change; documents that say the same give nothing.

    ``before`` is a snapshot, or noun → code key → document. Ids are compared without case, and keep the spelling that
    is stored. Revision and origin are no difference; an edit that changes what the document means makes its revision
    grow by one, others keep it. Nothing is removed, except ``removals`` that are stored, and that for the nouns
    named in ``complete_nouns`` a document that is missing from ``after`` is proposed for removal.

    Changes come in the order of the nouns, removals last. Raises DocumentError when ``after`` holds one id twice, or
    one that is to be removed.
    """
    return _changes(_documents(before), after, complete_nouns, removals, stored=False)


def due_revision(before: Document | None, after: Document) -> int | None:
    """Return the revision that ``after`` will have once it is accepted; None for a noun without revisions."""
    if before is None:
        return _revision(after)
    noun = NOUN_BY_DOCUMENT[type(after)]
    return _due(noun, before, after, differing_fields(noun, before, after))


def diff_snapshots(before: Snapshot | Documents, after: Snapshot | Documents) -> list[Change]:
    """Return the steps from one baseline to another: as ``diff``, with removals, and revisions as they are stored."""
    documents = [document for group in _documents(after).values() for document in group.values()]
    return _changes(_documents(before), documents, [noun.name for noun in NOUNS], (), stored=True)


def _documents(source: Snapshot | Documents) -> Documents:
    return source.documents if isinstance(source, Snapshot) else source


def _changes(
    before: Documents,
    after: Iterable[Document],
    complete_nouns: Collection[str],
    removals: Iterable[Document],
    *,
    stored: bool,
) -> list[Change]:
    changes: list[Change] = []
    given, unwanted = _by_noun(after), _by_noun(removals)
    _refuse_both(given, unwanted)
    for noun in NOUNS:
        known = before.get(noun.name, {})
        for key, document in given.get(noun.name, {}).items():
            change = _step(noun, known.get(key), document, stored=stored)
            if change:
                changes.append(change)
    for name in complete_nouns:
        if name not in NOUN_BY_NAME:
            raise DocumentError(f"{name!r} is no noun of a project", hint=f"one of {', '.join(NOUN_BY_NAME)}")
    for noun in reversed(NOUNS):  # what links to a document goes before it
        kept = given.get(noun.name, {})
        complete = noun.name in complete_nouns
        changes += [
            _removal(noun, document)
            for key, document in before.get(noun.name, {}).items()
            if (complete and key not in kept) or key in unwanted.get(noun.name, {})
        ]
    return changes


def _refuse_both(given: Documents, unwanted: Documents) -> None:
    for noun, documents in unwanted.items():
        for key in documents.keys() & given.get(noun, {}).keys():
            raise DocumentError(
                "the document is both given and to be removed",
                where=f"{NOUN_BY_NAME[noun].title} {_code(NOUN_BY_NAME[noun], documents[key])}",
            )


def _by_noun(documents: Iterable[Document]) -> dict[str, dict[str, Document]]:
    groups: dict[str, dict[str, Document]] = defaultdict(dict)
    for document in documents:
        noun = NOUN_BY_DOCUMENT[type(document)]
        code = _code(noun, document)
        if code_key(code) in groups[noun.name]:
            raise DocumentError(
                "the id is given twice", where=f"{noun.title} {code}", hint="keep one of the two"
            )
        groups[noun.name][code_key(code)] = document
    return groups


def _step(noun: Noun, before: Document | None, after: Document, *, stored: bool) -> Change | None:
    if before is None:
        return Change(noun=noun.name, id=_code(noun, after), action="add", after=payload_text(after))
    differing = differing_fields(noun, before, after)
    if not differing:
        return None
    return Change(
        noun=noun.name,
        id=_code(noun, before),
        action="edit",
        base_revision=_revision(before),
        fields=field_changes(noun, before, after, differing),
        before=payload_text(before),
        after=payload_text(after if stored else _accepted(noun, before, after, differing)),
    )


def _accepted(noun: Noun, before: Document, after: Document, differing: Sequence[str]) -> Document:
    """Return ``after`` as it is stored: the same things spelled as before, and the revision that is due."""
    changed = {name: getattr(after, name) for name in differing}
    origin = getattr(after, "origin", None)
    if origin is not None:
        changed["origin"] = origin
    revision = _due(noun, before, after, differing)
    if revision is not None:
        changed["revision"] = revision
    return before.model_copy(update=changed)


def _due(noun: Noun, before: Document, after: Document, differing: Sequence[str]) -> int | None:
    revision = _revision(before)
    grows = revision is not None and is_meaning_changing(noun, before, after, differing)
    return revision + 1 if revision is not None and grows else revision


def _removal(noun: Noun, document: Document) -> Change:
    return Change(
        noun=noun.name,
        id=_code(noun, document),
        action="remove",
        base_revision=_revision(document),
        before=payload_text(document),
    )


def _code(noun: Noun, document: Document) -> str:
    return str(getattr(document, noun.id_field))


def _revision(document: Document) -> int | None:
    revision: int | None = getattr(document, "revision", None)
    return revision
