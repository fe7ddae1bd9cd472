"""Names that are loaded late are the names of their modules, each of them, and nothing else is offered."""

from __future__ import annotations

import importlib
import pkgutil
import subprocess
import sys
from types import ModuleType

import pytest

PACKAGES = ("specflow.limits", "specflow.conditions", "specflow.units")


@pytest.mark.parametrize("package", PACKAGES)
def test_every_public_name_can_be_had(package: str) -> None:
    module = importlib.import_module(package)
    for name in module.__all__:
        found = getattr(module, name)
        assert getattr(module, name) is found  # the second time it is there without being asked for


@pytest.mark.parametrize("package", PACKAGES)
def test_no_public_name_hides_behind_the_module_of_its_name(package: str) -> None:
    module = importlib.import_module(package)
    for info in pkgutil.iter_modules(module.__path__):
        importlib.import_module(f"{package}.{info.name}")
    assert not [name for name in module.__all__ if isinstance(getattr(module, name), ModuleType)]


@pytest.mark.parametrize("package", PACKAGES)
def test_a_name_that_is_not_there_is_refused_as_anywhere(package: str) -> None:
    module = importlib.import_module(package)
    with pytest.raises(AttributeError, match="no_such_name"):
        _ = module.no_such_name


def test_judging_loads_nothing_that_reads_or_says() -> None:
    late = (
        "specflow.limits.words",
        "specflow.limits.difference",
        "specflow.conditions.parse",
        "specflow.conditions.maps",
        "specflow.units.reading",
    )
    code = f"import sys, specflow.verification; print([name for name in {late!r} if name in sys.modules])"
    shown = subprocess.run([sys.executable, "-c", code], check=True, capture_output=True, text=True).stdout
    assert shown.strip() == "[]"
