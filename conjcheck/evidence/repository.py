"""What a plug-in needs from its repository: the files that it imports, directly or not, and those that strings in them name."""

import ast
import os
import re
import sys
from functools import lru_cache
from pathlib import Path, PurePosixPath

from conjcheck.errors import RecordError

__all__ = ["Repository", "Stamp", "closure", "label", "stamp_of", "text_of"]

Stamp = tuple[int, ...]
"""The size of a file, and when it was changed last; empty for none."""

_ROOT_MARKS = (".git", "pyproject.toml", "setup.py", "setup.cfg", "pytest.ini", "tox.ini")
_FOREIGN = (
    "__pycache__",
    "__pypackages__",
    "build",
    "conda-meta",
    "dist",
    "dist-packages",
    "env",
    "node_modules",
    "site-packages",
    "venv",
)
_LONGEST_NAME = 200
_MOST_FILES = 20_000
_FILE_NAME = re.compile(r"[^\n]*\.[A-Za-z]\w{0,9}")


def closure(main: Path) -> tuple[list[Path], set[Path]]:
    """The plug-in file and the files of its repository that it imports, each once; and the other files that strings in these name.

    Raises:
        RecordError: one of the sources cannot be read, or is not UTF-8.
    """
    found, waiting = dict.fromkeys([main]), [main]
    repository = Repository(main)
    while waiting:
        path = waiting.pop()
        for name, level in _read(path, stamp_of(path))[0]:
            for other in repository.imported(name, level, path):
                if other not in found:
                    found[other] = None
                    waiting.append(other)
    named = (repository.called(text, path) for path in found for text in _read(path, stamp_of(path))[1])
    return list(found), {place for places in named for place in places} - {*found}


class Repository:
    """Where a plug-in lies.

    Attributes:
        top: its top folder, which bears a mark, or else the last conftest.py; of an installed package the folder of that.
        places: where imports are looked up: beside the plug-in, then upwards to the top, and in the folder src there.
    """

    def __init__(self, main: Path) -> None:
        above = [main.parent, *main.parent.parents]
        installed = next((k for k, folder in enumerate(above) if folder.name in ("site-packages", "dist-packages")), None)
        marked = [k for k, folder in enumerate(above) if any((folder / mark).exists() for mark in _ROOT_MARKS)]
        tests = [k for k, folder in enumerate(above) if (folder / "conftest.py").exists()]
        top = max(installed - 1, 0) if installed is not None else marked[0] if marked else tests[-1] if tests else 0
        self.top = above[top]
        self.places = [*above[: top + 1], self.top / "src"]
        self._by_name: dict[str, list[Path]] | None = None

    def imported(self, name: str, level: int, path: Path) -> list[Path]:
        """The files that an import in a file loads: the module, and the packages around it.

        conjcheck itself is known by its version instead. What is not found where Python looks first is looked for in the whole repository,
        since some folder of it may be on the path of Python.
        """
        parts = [part for part in name.split(".") if part]
        if not level and (not parts or parts[0] == "conjcheck"):
            return []
        for folder in [path.parents[level - 1]] if 0 < level <= len(path.parents) else self.places:
            found = [place for place in (folder / "__init__.py",) if level and place.is_file()]
            if parts and parts[-1] == "*":  # what a package names in its __all__ is imported, too
                found += [place for place in folder.joinpath(*parts[:-1]).glob("*.py") if len(parts) > 1 or level]
            for k in range(1, len(parts) + 1):
                stem = folder.joinpath(*parts[:k])
                found += [place for place in (stem / "__init__.py", stem.with_name(f"{stem.name}.py")) if place.is_file()]
            if found:
                return [place.resolve() for place in found]
        if level or parts[0] in sys.stdlib_module_names:
            return []
        stems = [tuple(parts[:k]) for k in range(1, len(parts) + 1)]
        ends = [end for stem in stems for end in ((*stem[:-1], f"{stem[-1]}.py"), (*stem, "__init__.py"))]
        return [place for end in ends for place in self._ending(end)]

    def called(self, text: str, path: Path) -> list[Path]:
        """The files that a string in a file names: from the folder of that, or else, if it looks like a name, in the whole repository."""
        try:
            if Path(text).is_absolute():
                return []
            place = path.parent / text
            if place.is_file():
                return [place.resolve()]
        except (OSError, ValueError):  # no name of a file
            return []
        return self._ending(PurePosixPath(text).parts) if _FILE_NAME.fullmatch(text) and not text.endswith(".log") else []

    def _ending(self, parts: tuple[str, ...]) -> list[Path]:
        """The files whose path ends like this; not in hidden folders, builds and environments, and of the first 20,000 files only."""
        if self._by_name is None:
            self._by_name, count = {}, 0
            for folder, folders, files in os.walk(self.top):
                folders[:] = sorted(name for name in folders if not self.is_foreign(Path(folder, name)))
                count += len(files)
                for name in files:
                    self._by_name.setdefault(name, []).append(Path(folder, name))
                if count > _MOST_FILES:
                    break
        wanted = tuple(part for part in parts if part not in ("", ".", ".."))
        found = self._by_name.get(wanted[-1], []) if wanted else []
        return [path.resolve() for path in found if path.parts[-len(wanted) :] == wanted]

    @staticmethod
    def is_foreign(folder: Path) -> bool:
        """Whether a folder holds nothing that people write: it is hidden, a build, or an environment."""
        marks = ("pyvenv.cfg", "conda-meta")
        return folder.name.startswith(".") or folder.name in _FOREIGN or any((folder / mark).exists() for mark in marks)


def label(path: Path, main: Path) -> str:
    """The name of a file relative to a plug-in, so that the place of the repository plays no part."""
    here = main.parent
    up = 0
    while not path.is_relative_to(here):
        here, up = here.parent, up + 1
    return "../" * up + path.relative_to(here).as_posix()


def text_of(path: Path) -> str:
    """The text of a source.

    Raises:
        RecordError: it cannot be read, or is not UTF-8.
    """
    try:
        return path.read_text(encoding="utf-8-sig")  # which reads every line end as \n
    except (OSError, UnicodeDecodeError) as error:
        raise RecordError(f"{path}: expected a readable Python file in UTF-8, got {error}") from None


def stamp_of(path: Path) -> Stamp:
    """The stamp of a file."""
    try:
        found = path.stat()
    except OSError:
        return ()
    return found.st_size, found.st_mtime_ns, found.st_ctime_ns


@lru_cache(maxsize=512)
def _read(path: Path, _stamp: Stamp) -> tuple[list[tuple[str, int]], list[str]]:
    """The modules that a file imports anywhere, as ``(dotted name, number of leading dots)``, and its strings."""
    text = text_of(path)
    try:
        tree = ast.parse(text)
    except (SyntaxError, ValueError):  # ValueError: a null byte
        return [], []
    found: list[tuple[str, int]] = []
    strings: dict[str, None] = {}
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            found += [(alias.name, 0) for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            module = node.module or ""
            found += [(module, node.level), *((f"{module}.{alias.name}".lstrip("."), node.level) for alias in node.names)]
        elif isinstance(node, ast.Call):
            called = node.func.attr if isinstance(node.func, ast.Attribute) else getattr(node.func, "id", "")
            if called in ("import_module", "__import__"):
                given = [*node.args[:1], *(keyword.value for keyword in node.keywords if keyword.arg == "name")]
                names = [value.value for value in given if isinstance(value, ast.Constant) and isinstance(value.value, str)]
                found += [(name.lstrip("."), len(name) - len(name.lstrip("."))) for name in names]
        elif isinstance(node, ast.Constant) and isinstance(node.value, str) and 0 < len(node.value) < _LONGEST_NAME:
            strings[node.value] = None
    return found, list(strings)
