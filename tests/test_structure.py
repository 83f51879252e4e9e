"""The shape of the kit: floors, cycles, module length, docstrings, forbidden tolerances."""

from __future__ import annotations

import ast
import doctest
import importlib
import inspect
import pkgutil
import re
from pathlib import Path

import pytest

import unlanded

ROOT = Path(__file__).resolve().parent.parent
KIT = ROOT / "kit" / "unlanded"
MODULES = {
    ".".join(p.relative_to(KIT).with_suffix("").parts): p
    for p in sorted(KIT.rglob("*.py")) if p.name != "__init__.py"
}
TESTS = sorted((ROOT / "tests").rglob("*.py"))


def floors() -> list[str]:
    """Every module in the order of the block headed 'floors' in DEVELOPERS.md, lowest first."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    block = re.search(r"```floors\n(.*?)```", text, re.DOTALL)
    assert block, "DEVELOPERS.md has no block ```floors"
    return [word for line in block[1].splitlines()
            for word in _floor_modules(line)]


def _floor_modules(line: str) -> list[str]:
    """'physics: constants section' -> physics.constants, physics.section."""
    folder, _, names = line.partition(":")
    folder = folder.strip()
    return [f"{folder}.{name}" if folder != "-" else name for name in names.split()]


def imported(path: Path) -> set[str]:
    """The kit's own modules that a module imports, anywhere in it."""
    package = path.relative_to(KIT).parent.parts
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if not isinstance(node, ast.ImportFrom):
            continue
        if node.level:
            base = (*package[: len(package) - node.level + 1], *(node.module or "").split("."))
        elif (node.module or "").split(".")[0] == "unlanded":
            base = tuple((node.module or "").split(".")[1:])
        else:
            continue
        dotted = ".".join(part for part in base if part)
        names = [f"{dotted}.{a.name}".lstrip(".") for a in node.names]
        found |= {dotted} & MODULES.keys() | set(names) & MODULES.keys()
    return found


def test_floors_name_every_module_once() -> None:
    listed = floors()
    assert sorted(listed) == sorted(MODULES)


@pytest.mark.parametrize("module", MODULES)
def test_imports_go_downward_only(module: str) -> None:
    order = floors()
    above = [m for m in imported(MODULES[module]) if order.index(m) >= order.index(module)]
    assert above == []


def test_physics_knows_no_units_tables_or_widgets() -> None:
    banned = re.compile(r"^\s*(?:from|import) (pint|pandas|ipywidgets|bqplot|matplotlib)", re.M)
    low = [m for m in MODULES if m.startswith(("physics.", "reference.", "study."))]
    assert low
    assert [m for m in low if banned.search(MODULES[m].read_text(encoding="utf-8"))] == []


@pytest.mark.parametrize("module", MODULES)
def test_modules_stay_under_400_lines(module: str) -> None:
    assert len(MODULES[module].read_text(encoding="utf-8").splitlines()) <= 400


@pytest.mark.parametrize("module", MODULES)
def test_examples_in_docstrings_hold(module: str) -> None:
    loaded = importlib.import_module(f"unlanded.{module}")
    assert doctest.testmod(loaded).failed == 0


def _public(module: str) -> list[tuple[str, object]]:
    loaded = importlib.import_module(f"unlanded.{module}")
    own = [(n, o) for n, o in vars(loaded).items()
           if not n.startswith("_") and getattr(o, "__module__", "") == loaded.__name__
           and (inspect.isclass(o) or inspect.isfunction(o))]
    methods = [(f"{n}.{m}", f) for n, o in own if inspect.isclass(o)
               for m, f in vars(o).items()
               if not m.startswith("_") and (inspect.isfunction(f) or isinstance(f, property))]
    return own + methods


@pytest.mark.parametrize("module", MODULES)
def test_every_public_name_has_a_docstring(module: str) -> None:
    assert [name for name, o in _public(module) if not inspect.getdoc(o)] == []


_PARAMETERS = re.compile(r"Parameters\n-+\n(.*?)(?:\n\n(?=\S)|\Z)", re.DOTALL)


@pytest.mark.parametrize("module", MODULES)
def test_documented_parameters_are_those_of_the_signature(module: str) -> None:
    wrong = []
    for name, o in _public(module):
        section = _PARAMETERS.search(inspect.getdoc(o) or "")
        if not section or isinstance(o, property):
            continue
        documented = {word for line in section[1].splitlines() if re.match(r"\w.* : ", line)
                      for word in re.split(r",\s*", line.partition(" : ")[0])}
        if unknown := documented - set(inspect.signature(o).parameters):  # type: ignore[arg-type]
            wrong.append(f"{name}: {sorted(unknown)}")
    assert wrong == []


@pytest.mark.parametrize("path", TESTS, ids=lambda p: p.name)
def test_approx_never_has_an_absolute_tolerance(path: Path) -> None:
    # A picofarad passes for zero otherwise. The other functions that do this are banned by ruff.
    wrong = []
    for call in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(call, ast.Call) and getattr(call.func, "attr", "") == "approx":
            absolute = next((k.value for k in call.keywords if k.arg == "abs"), None)
            if not isinstance(absolute, ast.Constant) or absolute.value != 0:
                wrong.append(call.lineno)
    assert wrong == []


def test_the_contents_page_names_what_exists() -> None:
    missing = [name for name in unlanded.__all__ if getattr(unlanded, name, None) is None]
    assert missing == []


def test_importing_the_kit_imports_nothing_heavy() -> None:
    import subprocess
    import sys

    heavy = ("scipy", "pandas", "matplotlib", "pint", "pydantic", "bqplot", "ipywidgets", "docx")
    code = f"import sys, unlanded; print([m for m in {heavy} if m in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_every_package_of_the_kit_can_be_imported() -> None:
    names = [m.name for m in pkgutil.walk_packages(unlanded.__path__, "unlanded.")]
    assert {importlib.import_module(n).__name__ for n in names} == set(names)
