"""The arrows of the design: imports run one way along the line, and start-up loads little."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1] / "auditor"

LINE = (
    ("encoding", "data_files", "core_scalars", "strict_yaml", "schema_check"),
    ("declaration", "run_values"),
    ("intake",),
    ("questions",),
    ("search",),
    ("claims",),
    ("structure", "element_orders", "attested"),
    ("routes",),
    ("facts",),
    ("inquiry",),
    ("rulebooks",),
    ("advice", "compare", "concessions"),
    ("report",),
    ("rule_pages", "review", "progress", "outputs", "search_extent"),
    ("verify", "demonstrate", "declare", "usage_draft"),
    ("commands",),
    ("cli", "api"),
)
"""From left to right; what stands together may import each other."""

RANK = {room: rank for rank, rooms in enumerate(LINE) for room in rooms}


def room_of(module: str) -> str:
    """The room that a module of the package stands in: ``auditor.facts.base`` in ``facts``."""
    return module.split(".")[1] if "." in module else ""


def modules() -> list[Path]:
    """Every module of the package."""
    return sorted(path for path in ROOT.rglob("*.py"))


def imported(path: Path) -> set[str]:
    """The modules of the package that a module imports anywhere in its text."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            found |= {f"{node.module}.{alias.name}" for alias in node.names}
    return {name for name in found if name.startswith("auditor.")}


@pytest.mark.parametrize("path", modules(), ids=lambda path: str(path.relative_to(ROOT)))
def test_imports_run_leftward(path: Path) -> None:
    """No module imports one that stands to its right."""
    room = path.relative_to(ROOT).parts[0].removesuffix(".py")
    if room == "__init__":
        return
    assert room in RANK, f"{room} has no place on the line"
    wrong = {
        name
        for name in imported(path)
        if room_of(name) in RANK and RANK[room_of(name)] > RANK[room]
    }

    assert not wrong


def test_checks_know_nothing_of_search() -> None:
    """A claim is checked without any code that could have found it."""
    for path in (ROOT / "claims").glob("*.py"):
        assert not {name for name in imported(path) if room_of(name) == "search"}, path.name


def test_search_knows_integers_only() -> None:
    """Search imports nothing of what is done with its results."""
    for path in (ROOT / "search").glob("*.py"):
        rooms = {room_of(name) for name in imported(path)}
        assert rooms <= {"search", "encoding"}, path.name


def test_routes_are_functions_of_numbers() -> None:
    """Routes import nothing of declarations, claims and facts."""
    for path in (ROOT / "routes").glob("*.py"):
        assert {room_of(name) for name in imported(path)} <= {"routes"}, path.name


def loaded_after(code: str) -> set[str]:
    """The top-level modules loaded once a fresh interpreter has run ``code``."""
    result = subprocess.run(
        [sys.executable, "-c", f"{code}\nimport sys; print(*sys.modules)"],
        capture_output=True,
        text=True,
        check=True,
    )
    return {name.split(".")[0] for name in result.stdout.split()}


def test_the_command_line_starts_light() -> None:
    """Heavy packages are loaded by the commands that need them."""
    heavy = {"rich", "jinja2", "sympy", "cryptography", "pebble", "flint", "cel", "distributed"}

    assert not loaded_after("import auditor.cli") & heavy


def test_a_review_of_documents_loads_no_certificate_reader() -> None:
    """Reading YAML loads neither cryptography nor templates."""
    assert not loaded_after("import auditor.review") & {"cryptography", "jinja2", "sympy"}
