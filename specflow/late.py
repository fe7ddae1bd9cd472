"""Names that a package offers but does not load until somebody asks for them.

A command like ``status`` needs the half of a package that computes, not the half that reads and says texts; loading
both is a tenth of what a person waits for. The package lists such names with the module each comes from:

    if TYPE_CHECKING:
        from specflow.limits.words import limit_words

    __getattr__ = late_names(__name__, {"limit_words": "words"})

A name that a module of the package has too (``expression_text``) cannot be among them: importing that module would
put the module in its place.
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Mapping
from importlib import import_module
from typing import Any


def late_names(package: str, modules: Mapping[str, str]) -> Callable[[str], Any]:
    """Return the ``__getattr__`` (PEP 562) of a package; ``modules`` maps a public name to its module there."""

    def load(name: str) -> Any:
        if name not in modules:
            raise AttributeError(f"module {package!r} has no attribute {name!r}")
        found = getattr(import_module(f"{package}.{modules[name]}"), name)
        setattr(sys.modules[package], name, found)
        return found

    return load
