"""What a rule is, as far as evidence goes: a hash of its file and of everything that the file needs from its repository."""

import hashlib
from dataclasses import dataclass
from pathlib import Path

from conjcheck.errors import RecordError
from conjcheck.evidence.repository import Repository, Stamp, closure, label, stamp_of, text_of
from conjcheck.oracle.guard import opened

__all__ = ["Version", "keep_version", "kept_version", "rule_hash", "source_files", "unseen", "version_of"]

_OURS = Path(__file__).resolve().parents[1]


def rule_hash(file: str | Path) -> str:
    """``sha256:`` and 64 hexadecimal digits: the same on every machine, another one after any change.

    Hashed are the texts (line ends made equal) and the names of the plug-in file and of all files of its repository that it imports,
    directly or not, also inside functions, and by ``import_module("name")``; and the bytes of files that these name in a string, such as
    ``"table.json"``. What is not found where Python would look first (beside the plug-in, above it, in ``src``) is looked for everywhere in
    the repository, and every file of that name counts: rather one too many. Not seen are installed packages, files outside the
    repository, hidden folders, builds and environments in it, and names that are made up while the rule runs.

    Raises:
        RecordError: no such file, or not UTF-8.
    """
    return version_of(file).rule


@dataclass(frozen=True, slots=True)
class Version:
    """What a rule is at one moment.

    Attributes:
        rule: its hash, see :func:`rule_hash`.
        files: the files that count, each with its stamp and the hash of its bytes.
    """

    rule: str
    files: tuple[tuple[Path, Stamp, str], ...]

    @property
    def changed(self) -> Path | None:
        """The first of these files that says something else now; quick where nobody has written to them."""
        for path, stamp, digest in self.files:
            if stamp_of(path) != stamp and (not path.is_file() or _bytes_hash(path) != digest):
                return path
        return None


def version_of(file: str | Path) -> Version:
    """The version of a rule as it stands in its file.

    Raises:
        RecordError: as for :func:`rule_hash`.
    """
    main = Path(file).resolve()
    sources, named = closure(main)
    files = tuple((path, stamp_of(path), _bytes_hash(path)) for path in [*sources, *sorted(named)])
    digests = {path: digest for path, _, digest in files}
    digest = hashlib.sha256()
    for path in sorted(sources, key=lambda path: (path == main, label(path, main))):
        text = text_of(path)
        digest.update(f"{label(path, main)}\0{len(text)}\0{text}\0".encode())
    for path in sorted(named, key=lambda path: label(path, main)):
        digest.update(f"{label(path, main)}\0data\0{digests[path]}\0".encode())
    return Version(f"sha256:{digest.hexdigest()}", files)


_kept: dict[Path, Version] = {}


def keep_version(file: str | Path, version: Version) -> None:
    """Remember which version of a file this process has imported."""
    _kept[Path(file).resolve()] = version


def kept_version(file: str | Path) -> Version:
    """The version that this process has imported last; of a file that it has not, that which stands there.

    Raises:
        RecordError: as for :func:`rule_hash`.
    """
    return _kept.get(Path(file).resolve()) or version_of(file)


def source_files(file: str | Path) -> list[Path]:
    """The plug-in file, then the files of the same repository that it imports, directly or not, each once."""
    return closure(Path(file).resolve())[0]


def unseen(file: str | Path) -> list[str]:
    """The files of its repository that a candidate was seen to read, but that its hash does not see, by their path from its folder.

    Only what ``oracle.guard.watch_opened`` notices.

    Raises:
        RecordError: as for :func:`rule_hash`.
    """
    main = Path(file).resolve()
    top, known, found = Repository(main).top, {path for path, _, _ in kept_version(main).files}, set()
    for path in (Path(name).resolve() for name in opened()):
        inside = path.is_relative_to(top) and not path.is_relative_to(_OURS) and path not in known and path.is_file()
        if inside and not any(
            Repository.is_foreign(folder) for folder in path.parents if folder.is_relative_to(top) and folder != top
        ):
            found.add(label(path, main))
    return sorted(found)


def _bytes_hash(path: Path) -> str:
    try:
        return hashlib.sha256(path.read_bytes()).hexdigest()
    except OSError as error:
        raise RecordError(f"{path}: expected a readable file, since the rule names it, got {error}") from None
