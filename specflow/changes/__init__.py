"""What differs between two sets of documents, as a list of changes that says what each change means.

The same list is the preview of an import (``diff``) and the comparison of two baselines (``diff_snapshots``);
``due_revision`` says which revision a document will have once it is accepted.
``difference.py`` finds the documents, ``fields.py`` compares them field by field, ``meaning.py`` puts a difference
into words and says which differences change what a document means; ``removal.py`` what a removal takes along. Nothing
here writes.
"""

from specflow.changes.difference import diff, diff_snapshots, due_revision

__all__ = ["diff", "diff_snapshots", "due_revision"]
