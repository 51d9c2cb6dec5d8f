"""What a rule is, as far as evidence goes: a hash of its file and of everything that the file imports from the same repository."""

import ast
import hashlib
import os
import re
import sys
from dataclasses import dataclass
from pathlib import Path, PurePosixPath

from conjcheck.errors import RecordError
from conjcheck.oracle.guard import opened

__all__ = ["Version", "keep_version", "kept_version", "rule_hash", "source_files", "unseen", "version_of"]

_ROOT_MARKS = (".git", "pyproject.toml", "setup.py", "setup.cfg", "pytest.ini", "tox.ini")
_OURS = Path(__file__).resolve().parents[1]
_LONGEST_NAME = 200
_MOST_FILES = 20_000
_FILE_NAME = re.compile(r"[^\n]*\.[A-Za-z]\w{0,9}")


def rule_hash(file: str | Path) -> str:
    """``sha256:`` and 64 hexadecimal digits: the same on every machine, another one after any change.

    Hashed are the texts (line ends made equal) and the names of the plug-in file and of all files of its repository that it imports,
    directly or not, also inside functions, and by ``import_module("name")``; and the bytes of files that these name in a string, such as
    ``"table.json"``. What is not found where Python would look first (beside the plug-in, above it, in ``src``) is looked for everywhere in
    the repository, and every file of that name counts: rather one too many. Not seen are installed packages, files outside the
    repository, and names that are made up while the rule runs.

    Raises:
        RecordError: no such file, or not UTF-8.
    """
    return version_of(file).rule


@dataclass(frozen=True, slots=True)
class Version:
    """What a rule is at one moment.

    Attributes:
        rule: its hash, see :func:`rule_hash`.
        files: the files that count, and of each its size and when it was written last.
    """

    rule: str
    files: tuple[tuple[Path, tuple[int, ...]], ...]

    @property
    def untouched(self) -> bool:
        """Whether nobody has written to these files since, not even what was there before; quick."""
        return all(_stamp(path) == stamp for path, stamp in self.files)


def version_of(file: str | Path) -> Version:
    """The version of a rule as it stands in its file.

    Raises:
        RecordError: as for :func:`rule_hash`.
    """
    main = Path(file).resolve()
    sources, named = _closure(main)
    stamps = tuple((path, _stamp(path)) for path in [*sources, *sorted(named)])
    digest = hashlib.sha256()
    for path in sorted(sources, key=lambda path: (path == main, _label(path, main))):
        text = _text(path)
        digest.update(f"{_label(path, main)}\0{len(text)}\0{text}\0".encode())
    for path in sorted(named, key=lambda path: _label(path, main)):
        digest.update(f"{_label(path, main)}\0data\0{_bytes_hash(path)}\0".encode())
    return Version(f"sha256:{digest.hexdigest()}", stamps)


_kept: dict[Path, Version] = {}


def keep_version(file: str | Path, version: Version) -> None:
    """Remember which version of a file this process has imported."""
    _kept[Path(file).resolve()] = version


def kept_version(file: str | Path) -> Version:
    """The version that this process has imported; of a file that it has not, that which stands there.

    Raises:
        RecordError: as for :func:`rule_hash`.
    """
    return _kept.get(Path(file).resolve()) or version_of(file)


def unseen(file: str | Path) -> list[str]:
    """The files of its repository that a rule has read, but that its hash does not see, by their path from the rule's folder.

    Only what was noticed: see ``oracle.guard.watch_opened``.

    Raises:
        RecordError: as for :func:`rule_hash`.
    """
    main = Path(file).resolve()
    top, known = _Repository(main).top, {path for path, _ in kept_version(main).files}
    found = set()
    for name in opened():
        path = Path(name).resolve()
        if (
            not path.is_relative_to(top)
            or path in known
            or path.is_relative_to(_OURS)
            or path.suffix == ".pyc"
            or not path.is_file()
        ):
            continue
        if not any(part.startswith(".") or Path(*path.parts[: k + 1], "pyvenv.cfg").exists() for k, part in enumerate(path.parts)):
            found.add(_label(path, main))
    return sorted(found)


def _stamp(path: Path) -> tuple[int, ...]:
    try:
        found = path.stat()
    except OSError:
        return ()
    return found.st_ino, found.st_size, found.st_mtime_ns


def source_files(file: str | Path) -> list[Path]:
    """The plug-in file, then the files of the same repository that it imports, directly or not, each once."""
    return _closure(Path(file).resolve())[0]


def _closure(main: Path) -> tuple[list[Path], set[Path]]:
    """The sources, and the other files that strings in them name."""
    found, waiting = dict.fromkeys([main]), [main]
    repository = _Repository(main)
    while waiting:
        path = waiting.pop()
        for name, level in _imported(path):
            for other in _resolved(name, level, path, repository):
                if other not in found:
                    found[other] = None
                    waiting.append(other)
    return list(found), _named_files(list(found), repository)


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


def _named_files(sources: list[Path], repository: "_Repository") -> set[Path]:
    """The files that strings in some sources name: from their own folder, or else anywhere in the repository."""
    found: set[Path] = set()
    for source in sources:
        for node in ast.walk(_tree(source)):
            if isinstance(node, ast.Constant) and isinstance(node.value, str) and 0 < len(node.value) < _LONGEST_NAME:
                try:
                    place = source.parent / node.value
                    if Path(node.value).is_absolute():
                        continue
                    if place.is_file():
                        found.add(place.resolve())
                    elif _FILE_NAME.fullmatch(node.value):
                        found.update(repository.named(PurePosixPath(node.value).parts))
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


class _Repository:
    """Where a plug-in lies.

    Attributes:
        places: where imports are looked up: beside the plug-in, then upwards to the top of its repository, and in the folder src there.
            The top bears a mark, or else the last conftest.py.
        top: the top.
    """

    def __init__(self, main: Path) -> None:
        above = [main.parent, *main.parent.parents]
        marked = [k for k, folder in enumerate(above) if any((folder / mark).exists() for mark in _ROOT_MARKS)]
        tests = [k for k, folder in enumerate(above) if (folder / "conftest.py").exists()]
        top = marked[0] if marked else tests[-1] if tests else 0
        self.places = [*above[: top + 1], above[top] / "src"]
        self.top = above[top]
        self._by_name: dict[str, list[Path]] | None = None

    def named(self, parts: tuple[str, ...]) -> list[Path]:
        """The files anywhere in it whose path ends like this; hidden folders and virtual environments left out."""
        if self._by_name is None:
            self._by_name = {}
            count = 0
            for folder, folders, files in os.walk(self.top):
                folders[:] = sorted(
                    f for f in folders if not f.startswith((".", "__pycache__")) and not self._is_foreign(folder, f)
                )
                count += len(files)
                for name in files:
                    self._by_name.setdefault(name, []).append(Path(folder, name))
                if count > _MOST_FILES:
                    break
        wanted = tuple(part for part in parts if part not in ("", ".", ".."))
        found = self._by_name.get(wanted[-1], []) if wanted else []
        return [path.resolve() for path in found if path.parts[-len(wanted) :] == wanted]

    @staticmethod
    def _is_foreign(folder: str, name: str) -> bool:
        return name == "node_modules" or Path(folder, name, "pyvenv.cfg").exists()


def _imported(path: Path) -> list[tuple[str, int]]:
    """The modules that a file imports anywhere, as ``(dotted name, number of leading dots)``."""
    found: list[tuple[str, int]] = []
    for node in ast.walk(_tree(path)):
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
    return found


def _resolved(name: str, level: int, path: Path, repository: _Repository) -> list[Path]:
    """The files that an import loads: the module, and the packages around it. conjcheck itself is known by its version instead."""
    parts = [part for part in name.split(".") if part]
    if not level and (not parts or parts[0] == "conjcheck"):
        return []
    folders = [path.parents[level - 1]] if 0 < level <= len(path.parents) else repository.places
    for folder in folders:
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
    stems = [tuple(parts[:k]) for k in range(1, len(parts) + 1)]  # some folder may be on the path of Python
    return [
        place
        for stem in stems
        for end in ((*stem[:-1], f"{stem[-1]}.py"), (*stem, "__init__.py"))
        for place in repository.named(end)
    ]
