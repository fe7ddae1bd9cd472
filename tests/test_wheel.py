"""The wheel, in a clean environment: it holds all it needs to create, open and upgrade a project."""

from __future__ import annotations

import os
import subprocess
import sys
import sysconfig
import venv
from pathlib import Path

import pytest

HERE = Path(__file__).parents[1]

USE = '''
import sys
from pathlib import Path
import specflow
from specflow.exchange import payload_text
from specflow.model.block import Block
from specflow.model.change import Change
from specflow.model.project import Project
from specflow.store import create_project, open_project, schema

package = Path(specflow.__file__).parent
assert package.is_relative_to(sys.prefix), package
assert schema.migrations_folder() == package / "migrations"

block = Block(id="LNA", name="low noise amplifier", tier="block")
with create_project("made.specflow", Project(name="Invented")) as store:
    store.apply([Change(noun="block", id="LNA", action="add", after=payload_text(block))], by="me")
with open_project("made.specflow") as store:
    assert store.load().blocks == [block]
    assert store.notes == ()

newest = schema.newest_version()
(package / "migrations" / "versions" / f"{newest + 1:04}_later.py").write_text(f"""
import sqlalchemy as sa
from alembic import op
revision = "{newest + 1:04}"
down_revision = "{newest:04}"
def upgrade():
    op.add_column("block", sa.Column("colour", sa.Text))
""")
with open_project("made.specflow") as store:
    print(*store.notes)
    assert store.load().blocks == [block]
'''


@pytest.fixture(scope="module")
def python(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the interpreter of a clean environment with the wheel in it; other packages are those of this one."""
    pytest.importorskip("build", reason="build is not installed")
    pytest.importorskip("pip", reason="pip is not installed")
    folder = tmp_path_factory.mktemp("wheel")
    run(sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(folder), str(HERE))
    (wheel,) = folder.glob("*.whl")
    venv.create(folder / "clean", with_pip=False)
    python = folder / "clean" / ("Scripts" if sys.platform == "win32" else "bin") / "python"
    run(
        sys.executable, "-m", "pip", "--python", str(python), "install", "--no-index", "--no-deps", str(wheel)
    )
    packages = Path(run(str(python), "-c", "import sysconfig; print(sysconfig.get_path('purelib'))").strip())
    # A path named in a .pth file comes after the environment's own, and its .pth files (this checkout) are not read.
    (packages / "others.pth").write_text(sysconfig.get_path("purelib") + "\n" + sysconfig.get_path("platlib"))
    return python


def run(*command: str, cwd: Path | None = None) -> str:
    """Run a program; return what it prints, or fail with what it complains about."""
    done = subprocess.run(command, cwd=cwd, capture_output=True, text=True, check=False, timeout=120)
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


def test_a_clean_installation_creates_opens_and_upgrades_a_project(python: Path, tmp_path: Path) -> None:
    printed = run(str(python), "-I", "-c", USE, cwd=tmp_path)
    assert "upgraded from schema" in printed
    assert len(list(tmp_path.glob("made.specflow-schema*"))) == 1


def test_a_clean_installation_builds_the_demo_from_its_own_examples(python: Path, tmp_path: Path) -> None:
    printed = run(str(python), "-I", "-m", "specflow", "demo", "shown", cwd=tmp_path)
    assert f"shown{os.sep}ferry-compliance.html" in printed
    assert (tmp_path / "shown" / "ferry.specflow").is_file()
