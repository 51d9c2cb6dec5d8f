"""Imports go down only: the floor table of DEVELOPERS.md, held against the source."""

import ast
import re
import sys
from functools import cache
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
STRATEGIES = "strategies/"
ENGINES = {
    "oracle/grassmannian.py": {"oracle/recursion.py", "oracle/comparison.py", "oracle/chevalley.py", "oracle/coordinates.py"},
    "oracle/localisation.py": {"oracle/recursion.py", "oracle/comparison.py", "oracle/chevalley.py", "oracle/grassmannian.py"},
    "oracle/recursion.py": {"oracle/grassmannian.py", "oracle/coordinates.py", "oracle/residues.py"},
    "oracle/comparison.py": {"oracle/grassmannian.py", "oracle/coordinates.py", "oracle/residues.py"},
    "oracle/chevalley.py": {"oracle/grassmannian.py", "oracle/coordinates.py", "oracle/recursion.py", "oracle/comparison.py"},
}
"""What an engine must not import, directly or by a detour."""


@cache
def floors():
    """The table: ``{room: floor}``."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    lines = iter(text.splitlines())
    assert any(re.fullmatch(r"\|\s*floor\s*\|\s*rooms\s*\|\s*what lives there\s*\|", line) for line in lines), "a table of floors"
    assert re.fullmatch(r"[|\s:-]+", next(lines))
    found = {}
    for line in lines:
        cells = [cell.strip() for cell in line.strip().strip("|").split("|")]
        if len(cells) != 3:
            break
        for room in re.findall(r"`([^`]+)`", cells[1]):
            assert room not in found, f"{room} stands in the table twice"
            found[room] = int(cells[0])
    return found


def modules():
    """Every module as ``{room: path}``; the rooms of ``strategies/`` under that name, links not followed."""
    found = {}
    for path in sorted((ROOT / "conjcheck").rglob("*.py")):
        room = path.relative_to(ROOT / "conjcheck").as_posix()
        if not room.startswith(STRATEGIES):
            found[room] = path
    for path in sorted((ROOT / "strategies").rglob("*.py")):
        found[STRATEGIES + path.relative_to(ROOT / "strategies").as_posix()] = path
    return found


MODULES = modules()


@cache
def tree(room):
    """The syntax tree of a room."""
    return ast.parse(MODULES[room].read_text(encoding="utf-8"))


def is_label(room):
    """Whether a room is the ``__init__`` of a folder, with a docstring and nothing else."""
    return room.endswith("/__init__.py") and [type(node) for node in tree(room).body] == [ast.Expr]


def floor_of(room):
    """The floor of a room; all of ``strategies/`` lives on one."""
    return floors()[STRATEGIES if room.startswith(STRATEGIES) else room]


def room_of(module):
    """The room of a module of ours by its dotted name, or ``None``."""
    if module.split(".")[0] != "conjcheck":
        return None
    stem = "/".join(module.split(".")[1:])
    for room in (f"{stem}.py", f"{stem}/__init__.py", "__init__.py" if not stem else ""):
        if room in MODULES:
            return room
    return None


@cache
def imports(room):
    """The rooms that a room imports anywhere: at the top, inside functions, for type checkers only, by ``import_module`` with a text."""
    found = set()
    for node in ast.walk(tree(room)):
        names = []
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{room}:{node.lineno}: imports are written in full"
            whole = [f"{node.module}.{alias.name}" for alias in node.names]
            names = [name if room_of(name) else node.module for name in whole]
        elif isinstance(node, ast.Call) and getattr(node.func, "id", getattr(node.func, "attr", "")) in (
            "import_module",
            "__import__",
        ):
            names = [arg.value for arg in node.args[:1] if isinstance(arg, ast.Constant)]
        found |= {(room_of(name), node.lineno) for name in names if room_of(name)}
    return frozenset(found)


def test_every_module_is_in_the_table():
    """Every module of ours has a floor, and every room of the table exists; only labels of folders have none."""
    rooms = {STRATEGIES if room.startswith(STRATEGIES) else room for room in MODULES if not is_label(room)}
    assert set(floors()) == rooms


@pytest.mark.parametrize("room", [room for room in MODULES if not is_label(room)])
def test_imports_go_down(room):
    """A room imports from lower floors only, or from its own package if that is ``strategies/``."""
    for other, line in imports(room):
        if is_label(other) or (room.startswith(STRATEGIES) and other.startswith(STRATEGIES)):
            continue
        assert floor_of(other) < floor_of(room), f"{room}:{line} (floor {floor_of(room)}) imports {other} (floor {floor_of(other)})"


def test_no_circles_inside_strategies():
    """Inside ``strategies/`` the imports make no circle."""
    rooms = [room for room in MODULES if room.startswith(STRATEGIES)]
    left = {room: {other for other, _ in imports(room) if other.startswith(STRATEGIES)} for room in rooms}
    while left:
        free = {room for room, needs in left.items() if not needs & set(left)}
        assert free, f"a circle among {sorted(left)}"
        left = {room: needs for room, needs in left.items() if room not in free}


@pytest.mark.parametrize("room", ENGINES)
def test_engines_are_independent(room):
    """An engine reaches no other engine, on no path of imports: their agreement means something."""
    seen, todo = set(), [room]
    while todo:
        fresh = {other for other, _ in imports(todo.pop())} - seen
        seen |= fresh
        todo += fresh
    assert room in MODULES
    assert not seen & ENGINES[room]


def test_errors_stand_alone():
    """The errors import nothing of ours."""
    assert imports("errors.py") == frozenset()


LIGHT = {"__init__.py": set(), "pytest_state.py": {"pytest"}, "pytest_plugin.py": {"pytest", "conjcheck.pytest_state"}}
"""What every pytest run imports, and what these rooms may import at their top besides the standard library."""


@pytest.mark.parametrize("room", LIGHT)
def test_the_plugin_is_light(room):
    """What every pytest run on a machine imports takes at its top only the standard library, pytest, and rooms as light."""
    names = set()
    for node in tree(room).body:
        if isinstance(node, ast.ImportFrom):
            names.add(node.module)
        elif isinstance(node, ast.Import):
            names |= {alias.name for alias in node.names}
    assert {name for name in names if name.split(".")[0] not in sys.stdlib_module_names} <= LIGHT[room]


@pytest.mark.parametrize("room", MODULES)
def test_the_first_line_says_what_it_is(room):
    """Every module begins with a docstring whose first line is a sentence of at most 132 characters."""
    doc = ast.get_docstring(tree(room))
    assert doc
    first = doc.splitlines()[0]
    assert len(first) > 15
    assert len(first) <= 132


def public(room):
    """The public names that a module defines itself: ``{name: node}``, classes, functions and methods."""
    found = {}
    for node in tree(room).body:
        if isinstance(node, (ast.FunctionDef, ast.ClassDef)) and not node.name.startswith("_"):
            found[node.name] = node
            if isinstance(node, ast.ClassDef):
                for inner in node.body:
                    if isinstance(inner, ast.FunctionDef) and (not inner.name.startswith("_") or inner.name == "__call__"):
                        found[f"{node.name}.{inner.name}"] = inner
    return found


@pytest.mark.parametrize("room", MODULES)
def test_public_things_have_a_page(room):
    """Every public class, function and method has a docstring."""
    missing = [name for name, node in public(room).items() if not ast.get_docstring(node)]
    assert not missing


HOOKS = {"pytest_plugin.py"}
"""Modules that pytest reads by the names of its hooks."""


@pytest.mark.parametrize("room", [room for room in MODULES if not is_label(room) and room not in HOOKS])
def test_all_is_there_and_sorted(room):
    """``__all__`` stands in every module, sorted, and names things that exist there."""
    found = [
        node.value for node in tree(room).body if isinstance(node, ast.Assign) and getattr(node.targets[0], "id", "") == "__all__"
    ]
    assert len(found) == 1
    if isinstance(found[0], ast.Call):
        assert room == "__init__.py"
        import conjcheck

        names = conjcheck.__all__
    else:
        names = ast.literal_eval(found[0])
    by_case = sorted(names, key=lambda name: (not name.isupper(), not name[0].isupper(), name))
    assert names in (by_case, sorted(names)), "constants, classes, functions, each in order"
    assert len(set(names)) == len(names)
    if room != "__init__.py":
        defined = {
            name
            for node in tree(room).body
            for name in (
                [getattr(node, "name", "")]
                + [target.id for target in getattr(node, "targets", []) if isinstance(target, ast.Name)]
                + [getattr(getattr(node, "target", None), "id", "")]
                + [alias.asname or alias.name for alias in getattr(node, "names", []) if not isinstance(node, ast.Global)]
            )
        }
        assert set(names) <= defined


def test_nothing_public_is_left_out():
    """What one module takes from another by a name without underscore is in the ``__all__`` of that other one."""
    taken = {}
    for room in MODULES:
        for node in ast.walk(tree(room)):
            if isinstance(node, ast.ImportFrom) and (other := room_of(node.module or "")):
                names = {alias.name for alias in node.names if not room_of(f"{node.module}.{alias.name}")}
                taken.setdefault(other, set()).update(name for name in names if not name.startswith("_"))
    for room, names in taken.items():
        if room not in HOOKS and room != "__init__.py":
            assert names <= offered(room), room


def offered(room):
    """The names in the ``__all__`` of a module."""
    for node in tree(room).body:
        if isinstance(node, ast.Assign) and getattr(node.targets[0], "id", "") == "__all__":
            return set(ast.literal_eval(node.value))
    return set()
