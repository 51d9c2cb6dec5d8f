"""What a rule is, as far as evidence goes: a hash of its file and of everything that the file imports from the same repository."""

import ast
import hashlib
from pathlib import Path

from conjcheck.errors import RecordError

__all__ = ["rule_hash", "source_files"]

_ROOT_MARKS = (".git", "pyproject.toml", "setup.py", "setup.cfg", "pytest.ini", "tox.ini")
_LONGEST_NAME = 200


def rule_hash(file: str | Path) -> str:
    """``sha256:`` and 64 hexadecimal digits: the same on every machine, another one after any change.

    Hashed are the texts (line ends made equal) and the names of the plug-in file and of all files of its repository that it imports,
    directly or not, also inside functions, and by ``import_module("name")``; and the bytes of files that these name in a string, by the
    path from their own folder, such as ``"table.json"``. Files and modules whose name is made up while the rule runs are not seen.

    Raises:
        RecordError: no such file, or not UTF-8.
    """
    main = Path(file).resolve()
    digest = hashlib.sha256()
    for path in sorted(source_files(main), key=lambda path: (path == main, _label(path, main))):
        text = _text(path)
        digest.update(f"{_label(path, main)}\0{len(text)}\0{text}\0".encode())
    for path in sorted(_named_files(source_files(main)), key=lambda path: _label(path, main)):
        digest.update(f"{_label(path, main)}\0data\0{_bytes_hash(path)}\0".encode())
    return f"sha256:{digest.hexdigest()}"


def source_files(file: str | Path) -> list[Path]:
    """The plug-in file, then the files of the same repository that it imports, directly or not, each once."""
    main = Path(file).resolve()
    found, waiting = dict.fromkeys([main]), [main]
    places = _places(main)
    while waiting:
        path = waiting.pop()
        for name, level in _imported(path):
            for other in _resolved(name, level, path, places):
                if other not in found:
                    found[other] = None
                    waiting.append(other)
    return list(found)


def _label(path: Path, main: Path) -> str:
    """The name of a file in the hash: relative to the plug-in, so that the place of the repository plays no part."""
    here = main.parent
    up = 0
    while not path.is_relative_to(here):
        here, up = here.parent, up + 1
    return "../" * up + path.relative_to(here).as_posix()


def _text(path: Path) -> str:
    try:
        return path.read_text(encoding="utf-8-sig")  # which reads every line end as \n
    except (OSError, UnicodeDecodeError) as error:
        raise RecordError(f"{path}: expected a readable Python file in UTF-8, got {error}") from None


def _named_files(sources: list[Path]) -> set[Path]:
    """The files that strings in some sources name."""
    found = set()
    for source in sources:
        for node in ast.walk(_tree(source)):
            if isinstance(node, ast.Constant) and isinstance(node.value, str) and 0 < len(node.value) < _LONGEST_NAME:
                try:
                    place = source.parent / node.value
                    if not Path(node.value).is_absolute() and place.is_file():
                        found.add(place.resolve())
                except (OSError, ValueError):  # no name of a file
                    continue
    return found - set(sources)


def _bytes_hash(path: Path) -> str:
    try:
        return hashlib.sha256(path.read_bytes()).hexdigest()
    except OSError as error:
        raise RecordError(f"{path}: expected a readable file, since the rule names it, got {error}") from None


def _tree(path: Path) -> ast.Module:
    """The program in a file, an empty one if it is none."""
    text = _text(path)
    try:
        return ast.parse(text)
    except (SyntaxError, ValueError):  # ValueError: a null byte
        return ast.Module([], [])


def _places(main: Path) -> list[Path]:
    """Where imports are looked up: beside the plug-in, then upwards to the top of its repository, and in the folder src there."""
    above = [main.parent, *main.parent.parents]
    top = next((k for k, folder in enumerate(above) if any((folder / mark).exists() for mark in _ROOT_MARKS)), 0)
    return [*above[: top + 1], above[top] / "src"]


def _imported(path: Path) -> list[tuple[str, int]]:
    """The modules that a file imports anywhere, as ``(dotted name, number of leading dots)``."""
    found: list[tuple[str, int]] = []
    for node in ast.walk(_tree(path)):
        if isinstance(node, ast.Import):
            found += [(alias.name, 0) for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            module = node.module or ""
            found += [(module, node.level), *((f"{module}.{alias.name}".lstrip("."), node.level) for alias in node.names)]
        elif isinstance(node, ast.Call) and node.args and isinstance(node.args[0], ast.Constant):
            called = node.func.attr if isinstance(node.func, ast.Attribute) else getattr(node.func, "id", "")
            name = node.args[0].value
            if called in ("import_module", "__import__") and isinstance(name, str):
                found.append((name.lstrip("."), len(name) - len(name.lstrip("."))))
    return found


def _resolved(name: str, level: int, path: Path, places: list[Path]) -> list[Path]:
    """The files that an import loads: the module, and the packages around it. conjcheck itself is known by its version instead."""
    parts = [part for part in name.split(".") if part]
    if not level and (not parts or parts[0] == "conjcheck"):
        return []
    folders = [path.parents[level - 1]] if 0 < level <= len(path.parents) else places
    for folder in folders:
        found = [place for place in (folder / "__init__.py",) if level and place.is_file()]
        if parts and parts[-1] == "*":  # what a package names in its __all__ is imported, too
            found += [place for place in folder.joinpath(*parts[:-1]).glob("*.py") if len(parts) > 1 or level]
        for k in range(1, len(parts) + 1):
            stem = folder.joinpath(*parts[:k])
            found += [place for place in (stem / "__init__.py", stem.with_name(f"{stem.name}.py")) if place.is_file()]
        if found:
            return [place.resolve() for place in found]
    return []
