"""What has to go, or to be changed, when documents are removed: nothing may be left that points to them."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass

from specflow.model.base import Document, code_key
from specflow.model.nouns import NOUN_BY_DOCUMENT, NOUNS, Noun
from specflow.model.snapshot import Snapshot

#: Noun and code key: what a link points to.
Key = tuple[str, str]


@dataclass(frozen=True, slots=True)
class Removal:
    """Documents to be removed with all that hangs on them.

    ``removed``: themselves, then what is about nothing else (a planned activity, a waiver, an allocation); ``changed``:
    what stays and loses the link (a child its parent, an evidence table the requirement that its sheet names);
    ``bound``: what cannot be without the link (a budget its last requirement): while it stands they cannot go.
    """

    removed: tuple[Document, ...]
    changed: tuple[Document, ...] = ()
    bound: tuple[Document, ...] = ()


def removal_of(unwanted: Sequence[Document], snapshot: Snapshot, given: Sequence[Document] = ()) -> Removal:
    """Return what the removal of stored documents takes along; ``given`` are documents as they are about to be stored.

    A link in a field that may be empty is cut. What needs the link goes too, and so does what hangs on that.
    """
    gone = {key_of(document): document for document in unwanted}
    while True:
        found = list(_hanging(gone.keys(), snapshot, given))
        further = {key_of(document): document for document, cut in found if cut is None}
        if not further:
            break
        gone |= further
    changed = [cut for _, cut in found if cut is not None]
    bound = [document for document in changed if not _is_whole(document)]
    kept = [document for document in changed if _is_whole(document)]
    return Removal(tuple(gone.values()), tuple(kept), tuple(bound))


def key_of(document: Document) -> Key:
    """Return noun and code key of a document."""
    noun = NOUN_BY_DOCUMENT[type(document)]
    return noun.name, code_key(str(getattr(document, noun.id_field)))


def _hanging(
    gone: Collection[Key], snapshot: Snapshot, given: Sequence[Document]
) -> Iterator[tuple[Document, Document | None]]:
    """Yield what points to something that goes: as it is, and without the links; None where it needs one of them."""
    laid_over = {key_of(document): document for document in given}
    for noun in NOUNS:
        stored = {
            (noun.name, key): document for key, document in snapshot.documents.get(noun.name, {}).items()
        }
        own = {key: document for key, document in laid_over.items() if key[0] == noun.name}
        for key, document in (stored | own).items():
            fields = {} if key in gone else dict(_cut(noun, document, gone))
            if fields:
                needs = any(value is None and _is_required(document, name) for name, value in fields.items())
                yield document, None if needs else document.model_copy(update=fields)


def _cut(noun: Noun, document: Document, gone: Collection[Key]) -> Iterator[tuple[str, object]]:
    """Yield the link fields that point to something that goes, each with what is left in it."""
    for field, target in noun.links:
        value = getattr(document, field)
        if isinstance(value, tuple):
            left = tuple(code for code in value if (target, code_key(code)) not in gone)
            if left != value:
                yield field, left
        elif value is not None and (target, code_key(value)) in gone:
            yield field, None


def _is_required(document: Document, field: str) -> bool:
    return type(document).model_fields[field].is_required()


def _is_whole(document: Document) -> bool:
    """Whether no list of links that has to name something is empty."""
    noun = NOUN_BY_DOCUMENT[type(document)]
    return all(getattr(document, field) != () or not _is_required(document, field) for field, _ in noun.links)
