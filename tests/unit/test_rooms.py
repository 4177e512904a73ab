"""The house stands: who may use whom, who opens files, who prints, who reads the clock."""

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2] / "fieldplan"
ROOMS = (
    "base", "stats", "campaign", "frame", "lab", "design", "sizing", "samples", "crew", "plan",
    "returns", "estimate", "packet", "cli",
)  # fmt: skip
OPENERS = {"campaign", "frame", "lab", "plan", "returns", "packet"}
FILE_CALLS = {"open", "read_text", "read_bytes", "write_text", "write_bytes"}
CLOCK_CALLS = {"today", "now", "utcnow", "time.time", "perf_counter", "monotonic"}
MODULES = sorted(ROOT.rglob("*.py"))


def room_of(path: Path) -> str | None:
    """Name the room of a module; None for the package's own front door."""
    parts = path.relative_to(ROOT).parts
    return parts[0] if len(parts) > 1 else None


def tree_of(path: Path) -> ast.Module:
    """Parse one module."""
    return ast.parse(path.read_text(encoding="utf-8"), filename=str(path))


def imported_rooms(tree: ast.Module) -> Iterator[tuple[int, str]]:
    """Yield line and room of every import of ours, those inside functions too."""
    for node in ast.walk(tree):
        names: list[str] = []
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom) and node.module:
            names = [node.module]
            if node.module == "fieldplan":
                names = [f"fieldplan.{alias.name}" for alias in node.names]
        for name in names:
            parts = name.split(".")
            if parts[0] == "fieldplan" and len(parts) > 1 and parts[1] in ROOMS:
                yield node.lineno, parts[1]


def called(node: ast.Call) -> str:
    """Name what is called, without the object before the dot; ``time.time`` keeps it."""
    if isinstance(node.func, ast.Attribute):
        owner = node.func.value
        of_clock = isinstance(owner, ast.Name) and owner.id == "time" and node.func.attr == "time"
        return "time.time" if of_clock else node.func.attr
    return node.func.id if isinstance(node.func, ast.Name) else ""


def calls(tree: ast.Module) -> Iterator[tuple[int, str]]:
    """Yield line and name of every call."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Call):
            yield node.lineno, called(node)


def test_every_folder_of_the_package_is_a_room() -> None:
    """A folder that is no room would escape every check below."""
    folders = {path.parent for path in MODULES}
    firsts = {f.relative_to(ROOT).parts[0] for f in folders if f != ROOT}
    assert firsts == set(ROOMS)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_a_room_uses_only_itself_and_the_rooms_above(path: Path) -> None:
    """The order of the rooms is the order of the job; a look back would tie knots."""
    room = room_of(path)
    if room is None:
        return
    allowed = set(ROOMS[: ROOMS.index(room) + 1])
    below = [(line, used) for line, used in imported_rooms(tree_of(path)) if used not in allowed]
    assert not below, f"{path} uses a room below it: {below}"


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_files_are_opened_only_where_the_house_says(path: Path) -> None:
    """A reviewer must be able to list every place where a file is read or written."""
    room = room_of(path)
    if room in OPENERS or path == ROOT / "base" / "files.py":
        return
    found = [(line, name) for line, name in calls(tree_of(path)) if name in FILE_CALLS]
    assert not found, f"{path} opens a file: {found}"


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_only_the_command_line_prints_and_reads_the_clock(path: Path) -> None:
    """A room that prints or reads the clock cannot be called twice with the same answer."""
    if room_of(path) == "cli":
        return
    forbidden = CLOCK_CALLS | {"print", "echo", "secho"}
    found = [(line, name) for line, name in calls(tree_of(path)) if name in forbidden]
    assert not found, f"{path} prints or reads the clock: {found}"


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_modules_and_functions_stay_small(path: Path) -> None:
    """Targets of the house: 400 lines a module, 40 lines a function without its docstring."""
    text = path.read_text(encoding="utf-8")
    assert len(text.splitlines()) <= 400
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            assert code_lines(node) <= 40, f"{path}:{node.lineno} {node.name}"


def code_lines(node: ast.FunctionDef | ast.AsyncFunctionDef) -> int:
    """Count the lines of a function's body after its docstring."""
    body = node.body
    if ast.get_docstring(node) is not None:
        body = body[1:]
    return (node.end_lineno or 0) - body[0].lineno + 1 if body else 0


def test_nine_functions_in_ten_fit_in_thirty_lines() -> None:
    """A share over the whole package, as the house asks."""
    sizes = [
        code_lines(node)
        for path in MODULES
        for node in ast.walk(tree_of(path))
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)
    ]
    assert sum(size <= 30 for size in sizes) >= 0.9 * len(sizes)


def test_no_verdict_word_is_printed_as_one() -> None:
    """The tool states intervals and defers; it never certifies a place."""
    verdicts = ("is safe", "are safe", "is clean", "is compliant", "is approved", "site passes")
    for path in MODULES:
        for node in ast.walk(tree_of(path)):
            if isinstance(node, ast.Constant) and isinstance(node.value, str):
                lowered = node.value.lower()
                assert not any(v in lowered for v in verdicts), f"{path}:{node.lineno}"
