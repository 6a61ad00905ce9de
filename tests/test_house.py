"""The house rules that can be read off the files: floors, names at the top, sizes, words."""

from __future__ import annotations

import ast
import codecs
import re
import shutil
import subprocess
from fnmatch import fnmatch
from functools import lru_cache
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
FLOORS = ("steam", "calorimeter", "measurement", "job", "screen")  # from the ground up
DRAWING = {"streamlit", "plotly"}  # the business of the uppermost floor alone
TESTING = {"CoolProp", "hypothesis", "playwright", "pytest"}  # in requirements.txt for the tests only
TOP = {"README.md", "DEVELOPERS.md", "requirements.txt", "app.py", "engine", "tests"}
HIDDEN = {".ci", ".gitignore", ".pictures", ".pytest.ini", ".ruff.toml", ".streamlit"}
LONGEST = 400  # lines; a longer module is two

# Where the product came from is no part of it. Scrambled, so that this file keeps its own rule.
SCRAMBLED = r"yrpgher|genafpevcg|frrq qbphzrag|gur pbhefr(?! bs| bire)|jbex/|\.\./funerq|snez|PRB"
WORDS = re.compile(rf"(?<!\w)(?:{codecs.decode(SCRAMBLED, 'rot13')})", re.IGNORECASE)


@lru_cache
def files() -> tuple[str, ...]:
    """What belongs to the project: what git tracks, or what lies there and is not ignored."""
    if (ROOT / ".git").exists() and shutil.which("git"):
        listed = subprocess.run(["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, text=True)
        if listed.returncode == 0:  # not so where git distrusts the folder's owner
            return tuple(name for name in listed.stdout.split("\0") if name and (ROOT / name).is_file())
    ignored = [".git", *(line.rstrip("/") for line in (ROOT / ".gitignore").read_text().split())]
    paths = (path.relative_to(ROOT) for path in ROOT.rglob("*") if path.is_file())
    return tuple(
        path.as_posix() for path in paths if not any(fnmatch(part, rule) for part in path.parts for rule in ignored)
    )


def modules() -> list[str]:
    return [name for name in files() if name.endswith(".py") and not name.startswith("tests/")]


def imported(name: str, text: str) -> set[str]:
    """Every module that a module imports, wherever in it, relative imports made absolute."""
    package = name.removesuffix(".py").split("/")[:-1]
    found = set()
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            start = ".".join(package[: len(package) - node.level + 1]) + "." if node.level else ""
            base = (start + (node.module or "")).rstrip(".")
            found |= {base} | {f"{base}.{alias.name}" for alias in node.names}
    return found


def floor(module: str) -> int:
    """Of ``engine.steam.units`` 0, and so on up; of what stands above all floors the top, of the package itself -1."""
    _, _, below = module.partition("engine.")
    name = below.split(".")[0]
    if module.startswith("engine") and name not in (*FLOORS, "__main__"):
        return -1  # ``engine`` and names in it, as its version
    return FLOORS.index(name) if name in FLOORS else len(FLOORS)


def trespasses(name: str, text: str) -> list[str]:
    """What a module imports that it must not."""
    own = floor(name.removesuffix(".py").replace("/", "."))
    found = []
    for module in sorted(imported(name, text)):
        first = module.split(".")[0]
        upward = first == "engine" and floor(module) > own
        drawing = first in DRAWING and own < FLOORS.index("screen")
        if upward or drawing or first in TESTING or first == "tests":
            found.append(f"{name} imports {module}")
    return found


def test_there_is_something_to_look_at():
    assert {f"engine/{name}/__init__.py" for name in FLOORS} <= set(files())


@pytest.mark.parametrize("name", modules())
def test_imports_point_downward(name):
    assert not trespasses(name, (ROOT / name).read_text())


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("engine/steam/units.py", "from engine.calorimeter import quality"),
        ("engine/steam/units.py", "from engine import job"),
        ("engine/steam/units.py", "from ..measurement import budget"),
        ("engine/steam/units.py", "from .. import screen"),
        ("engine/measurement/budget.py", "def f():\n    import engine.job.case"),
        ("engine/job/case/case.py", "import streamlit as st"),
        ("engine/job/case/case.py", "from plotly.graph_objects import Figure"),
        ("engine/screen/live.py", "import CoolProp.CoolProp"),
        ("engine/screen/live.py", "import engine.__main__"),
    ],
)
def test_an_arrow_that_points_upward_is_found(name, text):
    assert trespasses(name, text)


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("engine/screen/live.py", "import streamlit\nfrom engine.steam import saturated"),
        ("engine/job/case/case.py", "from . import fields\nfrom ..steam.units import unit"),
        ("engine/job/case/casefile.py", "from engine import __version__"),
        ("app.py", "import streamlit\nfrom engine.screen import shell"),
        ("engine/__main__.py", "from engine.job.case import Case"),
    ],
)
def test_an_arrow_that_points_downward_is_allowed(name, text):
    assert not trespasses(name, text)


def test_no_module_leads_back_to_itself():
    """Within a floor, too, imports run one way; a package's door counts as its modules' reader, not as theirs."""
    named = {name.removesuffix(".py").replace("/", "."): name for name in modules()}
    leads = {module: imported(name, (ROOT / name).read_text()) & set(named) for module, name in named.items()}
    with pytest.raises(CycleError):
        TopologicalSorter({"a": {"b"}, "b": {"a"}}).prepare()
    TopologicalSorter(leads).prepare()


def test_the_top_level_holds_the_agreed_names_only():
    tops = {name.split("/")[0] for name in files()}
    assert {name for name in tops if name.startswith(".")} <= HIDDEN
    assert {name for name in tops if not name.startswith(".")} <= TOP


@pytest.mark.parametrize("name", [*modules(), *(name for name in files() if name.endswith((".js", ".css")))])
def test_a_module_fits_in_the_head(name):
    assert len((ROOT / name).read_text().splitlines()) <= LONGEST


def test_the_files_speak_of_the_product_only():
    found = []
    for name in files():
        for number, line in enumerate((ROOT / name).read_text(errors="ignore").splitlines(), 1):
            found += [f"{name}:{number}: {line.strip()}"] if WORDS.search(line) else []
    assert not found, "\n".join(found)


def test_such_words_are_found_and_ordinary_ones_are_not():
    assert WORDS.search(codecs.decode("nf va gur Yrpgher", "rot13"))
    assert WORDS.search(codecs.decode("frr /jbex/abgrf", "rot13"))
    assert not WORDS.search(codecs.decode("bs pbhefr, n argjbex/cngpujbex, gur pbhefr bs n jnez-hc", "rot13"))
