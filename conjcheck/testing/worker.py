"""The process in which a survey calls a rule: ``python -m conjcheck.testing.worker``; it reads chunks and writes results, as JSON lines.

What it is doing stands in a small shared file (``Marks``), so that whoever started it can tell where the rule hung or killed it.
What the rule prints is thrown away. The process ends when its standard input does, or when its parent is gone.
"""

import json
import mmap
import os
import struct
import sys
from pathlib import Path
from typing import BinaryIO

from conjcheck.conjecture.declare import Conjecture
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import ConjcheckError
from conjcheck.evidence.source import rule_hash
from conjcheck.geometry.case import Case
from conjcheck.testing.chunks import Chunk, ChunkResult, compare_chunk, entry_of, rows_of_chunk
from conjcheck.testing.compare import Comparer

__all__ = ["Marks", "main", "run_chunk"]


class Marks:
    """Three numbers in a file that two processes share: a heartbeat, the place of the row, the place of the outcome in it plus one.

    The heart beats while the interpreter runs byte code during a comparison.
    """

    SIZE = 24

    def __init__(self, path: Path) -> None:
        with path.open("r+b") as file:
            self._memory = mmap.mmap(file.fileno(), self.SIZE)
        self._beats = 0

    NOWHERE = 2**64 - 1

    def clear(self) -> None:
        """Say that no row has been begun."""
        struct.pack_into("QQ", self._memory, 8, self.NOWHERE, 0)

    def beat(self) -> None:
        """Say that the interpreter is alive."""
        self._beats += 1
        struct.pack_into("Q", self._memory, 0, self._beats)

    def row(self, place: int) -> None:
        """Say which row is being compared."""
        self.beat()
        struct.pack_into("QQ", self._memory, 8, place, 0)

    def outcome(self, place: int) -> None:
        """Say which outcome of it."""
        self.beat()
        struct.pack_into("Q", self._memory, 16, place + 1)

    def read(self) -> tuple[int, int, int]:
        """Heartbeat, place of the row, place of the outcome plus one."""
        beat, row, outcome = struct.unpack_from("QQQ", self._memory)
        return beat, row, outcome


def run_chunk(chunk: Chunk, marks: Marks, *, careful: bool) -> ChunkResult:
    """Compare a chunk; ``careful``: its one row, outcome by outcome, each one marked before the rule is called."""
    try:
        conjecture = _conjecture(chunk)
    except ConjcheckError as error:
        return ChunkResult(problem=str(error))
    comparer = Comparer(conjecture, call_limit=chunk.call_limit, cross_check=chunk.cross_check)
    parent = os.getppid()

    def tick() -> None:
        marks.beat()
        if os.getppid() != parent:
            os._exit(0)

    comparer.limit.on_tick = tick
    if not careful:
        return compare_chunk(comparer, chunk, marks.row)
    (row,) = rows_of_chunk(chunk)
    comparer.truth(row)  # what the oracle does is not the rule's doing
    marks.row(chunk.first)
    if conjecture.by_rows:
        return compare_chunk(comparer, chunk)
    with comparer.limit:
        for place, (w, d) in enumerate(comparer.outcomes(row)):
            marks.outcome(place)
            if found := comparer.case(Case(row.X, row.u, row.v, w, d)):
                return ChunkResult(failing_rows=1, failing=1, findings=(entry_of(found),), ended=True)
    return ChunkResult(seen=1)


_loaded: dict[tuple[str, str, str], Conjecture] = {}


def _conjecture(chunk: Chunk) -> Conjecture:
    """The conjecture of a chunk, with the source that it must have."""
    key = chunk.file, chunk.name, chunk.rule
    if key not in _loaded:
        if (found := rule_hash(chunk.file)) != chunk.rule:
            raise ConjcheckError(
                f"expected {chunk.file} as it was when the survey began ({chunk.rule[:19]}), got {found[:19]}; start again"
            )
        named = [c for c in conjectures_in_file(Path(chunk.file)) if c.name == chunk.name]
        if not named:
            raise ConjcheckError(f"expected a conjecture {chunk.name!r} in {chunk.file}, got none")
        _loaded[key] = named[0]
    return _loaded[key]


def _limit_memory(most: int) -> None:
    """Let the process have that many bytes more than it has now; only on POSIX systems."""
    try:
        import resource

        now = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[0]) * resource.getpagesize()
        _, hard = resource.getrlimit(resource.RLIMIT_AS)
        wanted = now + most if hard == resource.RLIM_INFINITY else min(now + most, hard)
        resource.setrlimit(resource.RLIMIT_AS, (wanted, hard))
    except (ImportError, OSError, ValueError):
        return


def _serve(tasks: BinaryIO, answers: BinaryIO, marks: Marks) -> None:
    limited = False
    for line in tasks:
        task = json.loads(line)
        chunk = Chunk(**task["chunk"])
        if not limited:
            _limit_memory(chunk.memory)
            limited = True
        try:
            result = run_chunk(chunk, marks, careful=task["careful"])
        except MemoryError:
            result = ChunkResult(
                problem=f"{chunk.space}: the oracle needs more than the {chunk.memory / 2**30:.1f} GiB allowed; raise --memory"
            )
        answers.write(json.dumps(result.as_json()).encode() + b"\n")
        answers.flush()


def main() -> None:
    """Serve until the input ends."""
    answers = os.fdopen(os.dup(1), "wb")
    silence = os.open(os.devnull, os.O_WRONLY)
    os.dup2(silence, 1)
    tasks = os.fdopen(os.dup(0), "rb")
    os.dup2(os.open(os.devnull, os.O_RDONLY), 0)
    _serve(tasks, answers, Marks(Path(sys.argv[1])))


if __name__ == "__main__":
    main()
