"""The process in which a survey calls a rule: ``python -m conjcheck.testing.worker``; chunks in, results out, as lines of JSON.

What it is doing stands in a small shared file (``Marks``), so that whoever started it can tell where the rule hung or killed it.
What the rule prints is thrown away. The process ends when its standard input does, or when its parent is gone. A copy of it that the
rule made by a fork never answers.
"""

import contextlib
import ctypes
import json
import mmap
import os
import signal
import struct
import sys
from pathlib import Path
from typing import BinaryIO

from conjcheck.conjecture.declare import Conjecture
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import ConjcheckError
from conjcheck.evidence.ledger import library_mark
from conjcheck.evidence.source import rule_hash, unseen
from conjcheck.geometry.case import Case
from conjcheck.oracle.guard import watch_opened
from conjcheck.testing.chunks import Chunk, ChunkResult, compare_chunk, entry_of, rows_of_chunk
from conjcheck.testing.compare import Comparer
from conjcheck.testing.limits import CallLimit, let_exit

__all__ = ["Marks", "limit_memory", "main", "run_chunk"]


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


def run_chunk(chunk: Chunk, marks: Marks, *, careful: bool = False, until: int | None = None) -> ChunkResult:
    """Compare a chunk.

    Args:
        chunk: the piece.
        marks: told where it is.
        careful: its one row, outcome by outcome, each one marked before the rule is called; nothing else than whether the process
            survives that is of interest.
        until: collect the failures among so many first outcomes of its one row.
    """
    parent = os.getppid()

    def tick() -> None:
        marks.beat()
        if os.getppid() != parent:
            os._exit(0)

    try:
        with CallLimit(chunk.call_limit, tick):  # an import may take long
            conjecture = _conjecture(chunk)
    except ConjcheckError as error:
        return ChunkResult(problem=str(error))
    comparer = Comparer(conjecture, call_limit=chunk.call_limit, cross_check=chunk.cross_check)
    comparer.limit.on_tick = tick
    if not careful and until is None:
        return compare_chunk(comparer, chunk, marks.row)
    with comparer.limit:
        (row,) = rows_of_chunk(chunk)
        comparer.truth(row)  # what the oracle does is not the rule's doing
        marks.row(chunk.first)
        if conjecture.by_rows:
            return compare_chunk(comparer, chunk)
        found = []
        for place, (w, d) in enumerate(comparer.outcomes(row)[:until]):
            marks.outcome(place)
            if finding := comparer.case(Case(row.X, row.u, row.v, w, d)):
                found.append(entry_of(finding))
    return ChunkResult(seen=1, failing_rows=int(bool(found)), failing=len(found), findings=tuple(found))


_loaded: dict[tuple[str, str, str], Conjecture] = {}


def _conjecture(chunk: Chunk) -> Conjecture:
    """The conjecture of a chunk, with the source that it must have."""
    key = chunk.file, chunk.name, chunk.rule
    if key not in _loaded:
        if chunk.library and (own := library_mark()) != chunk.library:
            raise ConjcheckError(
                f"expected conjcheck {chunk.library} on all machines of a survey, got {own}; install the same everywhere"
            )
        if (found := rule_hash(chunk.file)) != chunk.rule:
            raise ConjcheckError(
                f"expected {chunk.file} as it was when the survey began ({chunk.rule[:19]}), got {found[:19]}; start again"
            )
        named = [c for c in conjectures_in_file(Path(chunk.file)) if c.name == chunk.name]
        if rule_hash(chunk.file) != chunk.rule:
            raise ConjcheckError(f"expected {chunk.file} to stay as it is while it is imported, it was changed; start again")
        if not named:
            raise ConjcheckError(f"expected a conjecture {chunk.name!r} in {chunk.file}, got none")
        _loaded[key] = named[0]
    return _loaded[key]


def limit_memory(most: int) -> None:
    """Let the process have that many bytes more than it has now; only on POSIX systems."""
    try:
        import resource

        now = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[0]) * resource.getpagesize()
        _, hard = resource.getrlimit(resource.RLIMIT_AS)
        wanted = now + most if hard == resource.RLIM_INFINITY else min(now + most, hard)
        resource.setrlimit(resource.RLIMIT_AS, (wanted, hard))
    except (ImportError, OSError, ValueError):
        return


def _end_with_parent(parent: int) -> None:
    """Let the system end this process when its parent ends, even if the rule hangs where no signal is looked at; only on Linux."""
    with contextlib.suppress(OSError, AttributeError):
        ctypes.CDLL(None).prctl(1, int(signal.SIGKILL))  # PR_SET_PDEATHSIG
    if os.getppid() != parent:  # it has ended before
        os._exit(0)


def _unseen(chunk: Chunk) -> list[str]:
    """What the rule has read so far that its hash does not see."""
    try:
        return unseen(chunk.file)
    except ConjcheckError:
        return []


def _serve(tasks: BinaryIO, answers: BinaryIO, marks: Marks) -> None:
    own = os.getpid()
    for served, line in enumerate(tasks):
        task = json.loads(line)
        chunk = Chunk(**task["chunk"])
        if not served:
            limit_memory(chunk.memory)
        try:
            result = run_chunk(chunk, marks, careful=task["careful"], until=task["until"])
        except MemoryError:
            result = ChunkResult(
                problem=f"{chunk.space}: the oracle needs more than the {chunk.memory / 2**30:.1f} GiB allowed; raise --memory"
            )
            short = True
        except Exception as error:  # the oracle's doing: whatever a rule raises is a finding
            result = ChunkResult(problem=f"{chunk.space}: {type(error).__name__}: {error}")
            short = False
        else:
            short = any(entry["detail"].startswith("MemoryError") for entry in result.findings)
        if os.getpid() != own:
            os._exit(0)
        # Earlier chunks take memory, too: what is short here may be enough in a fresh process.
        answer = {"task": task["task"], "again": short and served > 0, "result": result.as_json()}
        answer["unseen"] = _unseen(chunk) if chunk.seed is not None else []
        answers.write(json.dumps(answer).encode() + b"\n")
        answers.flush()


def main() -> None:
    """Serve until the input ends: ``worker FILE_OF_MARKS PID_OF_PARENT``."""
    let_exit()
    watch_opened()
    answers = os.fdopen(os.dup(1), "wb")
    silence = os.open(os.devnull, os.O_WRONLY)
    os.dup2(silence, 1)
    tasks = os.fdopen(os.dup(0), "rb")
    os.dup2(os.open(os.devnull, os.O_RDONLY), 0)
    path = Path(sys.argv[1])
    marks = Marks(path)
    with contextlib.suppress(OSError):  # it stays readable for those who have it open, and nothing is left of it afterwards
        path.unlink()
    _end_with_parent(int(sys.argv[2]))
    _serve(tasks, answers, marks)


if __name__ == "__main__":
    main()
