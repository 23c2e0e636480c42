"""The plan of the house: who may import whom, and what start-up may load."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parent.parent / "tankcalc"

ORDER = (
    "text",
    "errors",
    "constants",
    "units",
    "surroundings",
    "geometry",
    "fluids",
    "hydrostatics",
    "instruments",
    "signals",
    "tank",
    "readings",
    "result",
    "gauging",
    "sums",
    "uncertainty",
    "terms",
    "limits",
    "consistency",
    "span",
    "typed",
    "profiles",
    "report",
    "shiftlog",
    "balance",
    "watch",
    "handover",
    "cli",
    "tui",
    "__main__",
)
"""From the bottom up: a module imports only from those before it, and from its own package."""

ALLOWED_UP = {
    # The command that opens the console is the one that knows of it.
    ("cli", "tui"),
}

ONLY_IN = {
    "pint": {"units"},
    "pydantic": set(),
    "pydantic_core": {"profiles"},
    "tomlkit": {"profiles"},
    "sqlite3": {"shiftlog"},
    "textual": {"tui"},
    "rich": {"tui"},
    "platformdirs": {"profiles", "shiftlog", "tui"},
}


def imports_of(path: Path) -> set[str]:
    """Every module that a file imports, also inside functions, not those for types alone."""
    found: set[str] = set()

    def visit(node: ast.AST) -> None:
        for child in ast.iter_child_nodes(node):
            if isinstance(child, ast.If) and "TYPE_CHECKING" in ast.unparse(child.test):
                continue
            if isinstance(child, ast.Import):
                found.update(alias.name for alias in child.names)
            elif isinstance(child, ast.ImportFrom):
                assert child.level == 0, f"{path}: relative import"
                module = child.module or ""
                found.update(f"{module}.{alias.name}" for alias in child.names)
            visit(child)

    visit(ast.parse(path.read_text()))
    return found


def part_of(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


MODULES = sorted(path for path in PACKAGE.rglob("*.py") if path != PACKAGE / "__init__.py")


def test_every_part_has_its_place_in_the_order() -> None:
    assert {part_of(path) for path in MODULES} == set(ORDER)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_imports_point_downwards(path: Path) -> None:
    own = part_of(path)
    for name in imports_of(path):
        head, *rest = name.split(".")
        if head == "tankcalc" and rest and rest[0] in ORDER:
            other = rest[0]
            downwards = ORDER.index(other) <= ORDER.index(own)
            assert downwards or (own, other) in ALLOWED_UP, f"{own} imports {name}"
        if head in ONLY_IN:
            assert own in ONLY_IN[head], f"{own} imports {head}"


def loaded_after(code: str) -> set[str]:
    """What a fresh interpreter has loaded after running some code."""
    probe = f"{code}\nimport sys\nprint(*sorted(sys.modules))"
    done = subprocess.run([sys.executable, "-c", probe], capture_output=True, text=True, check=True)
    return set(done.stdout.split())


def test_calculating_loads_no_screen_no_pint_and_no_scipy() -> None:
    loaded = loaded_after(
        "from tankcalc.profiles import find_site, load_site\n"
        "from tankcalc.gauging import evaluate\n"
        "from tankcalc.typed import readings_from_text\n"
        "site = load_site(find_site()[0])\n"
        "tank = site.tank('T-101')\n"
        "readings, problems = readings_from_text(tank, {'level': '5 m'})\n"
        "assert not problems\n"
        "assert evaluate(tank, site.fluid_for(tank, None), readings).mass_kg > 0"
    )
    unwanted = {"textual", "rich", "pint", "scipy", "tomlkit", "sqlite3"}
    assert not unwanted & loaded


def test_the_calculation_alone_loads_no_validation() -> None:
    assert "pydantic_core" not in loaded_after("import tankcalc.gauging, tankcalc.geometry")


def test_finding_the_site_loads_nothing_heavy() -> None:
    loaded = loaded_after("from tankcalc.profiles import find_site\nfind_site()")
    assert not {"numpy", "pydantic_core", "textual", "pint", "scipy"} & loaded


def test_the_console_paints_before_it_loads_anything_heavy() -> None:
    loaded = loaded_after("import tankcalc.tui.app")
    assert not {"numpy", "pydantic_core", "pint", "scipy", "sqlite3", "tomlkit"} & loaded
