"""The ledger: a local SQLite file with one line per finished chunk of a survey, so that a killed survey goes on where it was.

A line counts only for the same rule (a hash of its source), the same conjecture, the same library (a hash of its source, the engines
included), the same space and the same rows. Results are JSON text, read back as plain data; nothing is unpickled or evaluated.
A digest of key and result stands in each line: a digit that flipped on the disk is noticed.
"""

import hashlib
import json
import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from types import TracebackType
from typing import Any

from conjcheck.errors import LedgerError
from conjcheck.evidence.entries import own_version

__all__ = ["ChunkKey", "Ledger", "library_mark"]

_MAGIC = b"SQLite format 3\x00"
_APPLICATION = 0x436A6C31
_VERSION = 1
_WAIT_SECONDS = 60.0
_TABLE = """
CREATE TABLE IF NOT EXISTS chunks (
    rule TEXT NOT NULL, conjecture TEXT NOT NULL, library TEXT NOT NULL, space TEXT NOT NULL, part TEXT NOT NULL,
    first INTEGER NOT NULL, last INTEGER NOT NULL, result TEXT NOT NULL, digest TEXT NOT NULL,
    PRIMARY KEY (rule, conjecture, library, space, part, first, last)
) WITHOUT ROWID
"""
_SELECT = """
SELECT result, digest FROM chunks
WHERE rule = ? AND conjecture = ? AND library = ? AND space = ? AND part = ? AND first = ? AND last = ?
"""


@dataclass(frozen=True, slots=True)
class ChunkKey:
    """What a line of the ledger is about.

    Attributes:
        rule: the hash of the rule's source.
        conjecture: its name.
        library: :func:`library_mark`.
        space: the name of the flag variety.
        part: which machinery and with which settings, e.g. ``"rows"`` or ``"sample seed 7"``.
        first, last: the 0-based places ``first <= k < last`` of the rows.
    """

    rule: str
    conjecture: str
    library: str
    space: str
    part: str
    first: int
    last: int

    @property
    def columns(self) -> tuple[str, str, str, str, str, int, int]:
        """The key as SQLite sees it."""
        return self.rule, self.conjecture, self.library, self.space, self.part, self.first, self.last


@cache
def library_mark() -> str:
    """The version of conjcheck and a hash of its source, but for commands and reports: results of another library are not inherited."""
    root = Path(__file__).parents[1]
    digest = hashlib.sha256()
    for path in sorted(root.rglob("*.py")):
        if path.relative_to(root).parts[0] in ("cli", "report"):
            continue
        digest.update(path.relative_to(root).as_posix().encode() + b"\0" + path.read_bytes() + b"\0")
    return f"{own_version()}+{digest.hexdigest()[:16]}"


class Ledger:
    """An open ledger; a context manager.

    Args:
        path: the file; made if there is none.

    Raises:
        LedgerError: the file is no ledger of ours, one of a later version, or damaged. It is left untouched.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        self._check_head()
        try:
            path.parent.mkdir(parents=True, exist_ok=True)
            self._base = sqlite3.connect(path, timeout=_WAIT_SECONDS, isolation_level=None)
        except (OSError, sqlite3.Error) as error:
            raise LedgerError(f"{path}: expected a file that can be written, got {error}; choose another with --ledger") from None
        try:
            with self._trouble():
                self._prepare()
        except BaseException:
            self._base.close()
            raise

    def __enter__(self) -> "Ledger":
        return self

    def __exit__(self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None) -> None:
        self._base.close()

    def _check_head(self) -> None:
        """Look at the first bytes before SQLite does, since SQLite may repair what it opens."""
        if not self.path.exists():
            return
        try:
            with self.path.open("rb") as file:
                head = file.read(100)
        except OSError as error:
            raise LedgerError(f"{self.path}: expected a readable file, got {error}; choose another with --ledger") from None
        if not head:
            return
        foreign = (
            f"{self.path}: expected a ledger of conjcheck, got another file; nothing was changed, choose another with --ledger"
        )
        if len(head) < 100 or not head.startswith(_MAGIC):
            raise LedgerError(foreign)
        version, application = int.from_bytes(head[60:64], "big"), int.from_bytes(head[68:72], "big")
        if application != _APPLICATION:
            raise LedgerError(foreign)
        if version > _VERSION:
            raise LedgerError(
                f"{self.path}: expected a ledger of version {_VERSION}, got version {version}; use the conjcheck that wrote it"
            )

    def _prepare(self) -> None:
        """Check what is there, and make what is missing."""
        if (found := self._base.execute("PRAGMA quick_check(1)").fetchone()) != ("ok",):
            raise LedgerError(
                f"{self.path}: damaged: {found[0]}; nothing was changed, restore the file or choose another with --ledger"
            )
        with self._transaction():  # also to see at once whether it can be written
            if self._base.execute("PRAGMA application_id").fetchone() == (0,):
                self._base.execute(_TABLE)
                self._base.execute(f"PRAGMA application_id = {_APPLICATION}")
                self._base.execute(f"PRAGMA user_version = {_VERSION}")
            self._base.execute("SELECT rule, conjecture, library, space, part, first, last, result, digest FROM chunks LIMIT 1")

    @contextmanager
    def _trouble(self) -> Iterator[None]:
        """Whatever SQLite says, as one error of ours that names the file."""
        try:
            yield
        except sqlite3.Error as error:
            raise LedgerError(f"{self.path}: the ledger cannot be used: {error}; choose another with --ledger") from None

    @contextmanager
    def _transaction(self) -> Iterator[None]:
        self._base.execute("BEGIN IMMEDIATE")
        try:
            yield
            self._base.execute("COMMIT")
        except BaseException:
            if self._base.in_transaction:
                self._base.execute("ROLLBACK")
            raise

    def get(self, key: ChunkKey) -> dict[str, Any] | None:
        """The result of a chunk, ``None`` if it is not finished.

        Raises:
            LedgerError: the line is damaged.
        """
        with self._trouble(), closing(self._base.execute(_SELECT, key.columns)) as cursor:
            found = cursor.fetchone()
        if found is None:
            return None
        try:
            result = json.loads(found[0]) if found[1] == _digest(key, found[0]) else None
        except (TypeError, ValueError, RecursionError):
            result = None
        if not isinstance(result, dict):
            raise LedgerError(
                f"{self.path}: damaged: expected the result of rows {key.first} to {key.last} of {key.space} as it was written; "
                "delete the file, or choose another with --ledger"
            )
        return result

    def put(self, key: ChunkKey, result: dict[str, Any]) -> None:
        """Keep the result of a finished chunk, at once and durably."""
        text = json.dumps(result)
        line = *key.columns, text, _digest(key, text)
        with self._trouble(), self._transaction():
            self._base.execute("INSERT OR REPLACE INTO chunks VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)", line)

    def stale(self, conjecture: str, rule: str, library: str) -> list[tuple[str, int, bool]]:
        """What is kept for a conjecture of this name but counts no more: ``(space, rows, whether the rule is another one)``."""
        text = """SELECT space, SUM(last - first), rule != ? FROM chunks WHERE conjecture = ? AND (rule != ? OR library != ?)
                  GROUP BY space, rule != ? ORDER BY space"""
        with self._trouble():
            found = self._base.execute(text, (rule, conjecture, rule, library, rule)).fetchall()
        return [(space, rows, bool(other)) for space, rows, other in found]


def _digest(key: ChunkKey, text: str) -> str:
    """What stands beside a result, so that a line that is damaged is not believed."""
    return hashlib.sha256(json.dumps([*key.columns, text]).encode()).hexdigest()
