"""A rule called in a process of its own: what hangs, exits, is killed or eats memory becomes a finding with its case.

:func:`isolated` is what any ``concurrent.futures.Executor`` is given to do, on this machine or on another: each thread that calls it
keeps one process (``conjcheck.testing.worker``). Only lines of JSON pass between them.
"""

import contextlib
import json
import os
import signal
import subprocess
import sys
import tempfile
import threading
import weakref
from dataclasses import asdict, replace
from pathlib import Path
from time import monotonic

from conjcheck.geometry.case import Case, Row, outcomes
from conjcheck.testing.chunks import Chunk, ChunkResult, entry_of, rows_of_chunk
from conjcheck.testing.finding import Finding
from conjcheck.testing.worker import Marks

__all__ = ["close_all", "isolated"]

_GRACE = 10.0
_MOST_DEATHS = 3
"""A chunk whose process dies this often, each time in a row that is innocent when compared alone, is given up."""


class _Died(Exception):
    """The process ended in the middle of a chunk: how, and where it was (``Marks``)."""

    def __init__(self, how: str, row: int, outcome: int, *, slow: bool) -> None:
        super().__init__(how)
        self.how, self.row, self.outcome, self.slow = how, row, outcome, slow


class _Closed(Exception):
    """The process was ended by :func:`close_all`."""


class _Process:
    """One worker process and the file of its marks."""

    def __init__(self) -> None:
        handle, name = tempfile.mkstemp(prefix="conjcheck-")
        os.write(handle, b"\0" * Marks.SIZE)
        os.close(handle)
        self._path = Path(name)
        self._marks = Marks(self._path)
        self._child = subprocess.Popen(  # noqa: S603  # ourselves
            [sys.executable, "-m", "conjcheck.testing.worker", name],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            start_new_session=True,  # Ctrl-C is for whoever runs the survey
        )
        self._answer = b""
        self.close = weakref.finalize(self, _end, self._child, self._path)

    @property
    def pid(self) -> int:
        """The process."""
        return self._child.pid

    def run(self, chunk: Chunk, *, careful: bool = False) -> ChunkResult:
        """Compare a chunk there.

        Raises:
            _Died: the process did not survive it, or did not answer and was ended.
        """
        assert self._child.stdin is not None, "it has a pipe"
        reader = threading.Thread(target=self._read, daemon=True)
        self._answer = b""
        self._marks.clear()
        with contextlib.suppress(OSError):  # it is dead: noticed below
            self._child.stdin.write(json.dumps({"chunk": asdict(chunk), "careful": careful}).encode() + b"\n")
            self._child.stdin.flush()
        reader.start()
        patience = chunk.call_limit + _GRACE
        heard, beat = monotonic(), -1
        slow = False
        while reader.is_alive():
            reader.join(0.5)
            now, _, _ = self._marks.read()
            if now != beat:
                heard, beat = monotonic(), now
            elif monotonic() - heard > patience and reader.is_alive():
                slow = True
                self._child.kill()
        try:
            return ChunkResult.parse(json.loads(self._answer))
        except ValueError:
            if not self.close.alive:
                raise _Closed from None
            self._child.kill()
            code = self._child.wait()
            _, row, outcome = self._marks.read()
            raise _Died(_ending(code, chunk, slow=slow), row, outcome, slow=slow) from None

    def _read(self) -> None:
        assert self._child.stdout is not None, "it has a pipe"
        self._answer = self._child.stdout.readline()


def _end(child: subprocess.Popen[bytes], path: Path) -> None:
    """End a worker process: nothing that it does is needed any more."""
    child.kill()
    child.wait()
    for pipe in (child.stdin, child.stdout):
        if pipe is not None:
            with contextlib.suppress(OSError):
                pipe.close()
    path.unlink(missing_ok=True)


def _ending(code: int, chunk: Chunk, *, slow: bool) -> str:
    if slow:
        return f"one call took longer than {chunk.call_limit:g} s and could not be interrupted"
    if code >= 0:
        return f"the process of the rule ended itself, with status {code}"
    name = signal.Signals(-code).name if -code in {*signal.Signals} else f"signal {-code}"
    return f"the process of the rule was ended by {name}" + (" (out of memory?)" if name == "SIGKILL" else "")


_here = threading.local()
_all: "weakref.WeakSet[_Process]" = weakref.WeakSet()


def _process(*, fresh: bool = False) -> _Process:
    """The process of this thread."""
    if fresh and (old := getattr(_here, "process", None)):
        old.close()
        _here.process = None
    if getattr(_here, "process", None) is None:
        _here.process = _Process()
        _all.add(_here.process)
    found: _Process = _here.process
    return found


def close_all() -> None:
    """End all worker processes of this process; a chunk in flight is lost."""
    for process in list(_all):
        process.close()


def isolated(text: str) -> str:
    """Compare a chunk in a process of its own.

    Args:
        text: the chunk, ``Chunk.as_text()``.

    Returns:
        Its ``ChunkResult`` as JSON. A row in which the process dies is compared once more alone, outcome by outcome: if it dies
        again, that is a finding (``crashed`` or ``too-slow``); if not, it was killed from outside and the chunk is run again.
    """
    chunk = Chunk.parse(text)
    total, deaths, place = ChunkResult(), 0, chunk.first
    while place < chunk.last and not total.ended and not total.problem:
        try:
            total += _process().run(chunk.part(place, chunk.last))
            break
        except _Closed:
            total += ChunkResult(problem="stopped")
        except _Died as death:
            row = death.row
            found = _alone(chunk.part(row, row + 1)) if place <= row < chunk.last else None
            if found is None:
                deaths += 1
                if deaths == _MOST_DEATHS:
                    total += ChunkResult(
                        problem=f"{chunk.space}: {death.how}, {deaths} times, but not in a row that was compared alone"
                    )
                continue
            if row > place:
                try:
                    total += _process().run(chunk.part(place, row))
                except (_Died, _Closed):
                    continue
            total += found if chunk.every else replace(found, seen=0, ended=True)
            place = row + 1
    return json.dumps(total.as_json())


def _alone(chunk: Chunk) -> ChunkResult | None:
    """What a row gives when it is compared alone in a fresh process: a finding if that dies again, ``None`` if the row is innocent."""
    try:
        _process(fresh=True).run(chunk, careful=True)
    except _Closed:
        return None
    except _Died as again:
        _process(fresh=True)
        if again.row == Marks.NOWHERE:
            return None
        (row,) = rows_of_chunk(chunk)
        where: Row | Case = row
        if again.outcome:
            w, d = outcomes(row.X, row.u.length + row.v.length, **chunk.rings)[again.outcome - 1]
            where = Case(row.X, row.u, row.v, w, d)
        finding = Finding("too-slow" if again.slow else "crashed", where, detail=again.how)
        return ChunkResult(seen=1, failing_rows=1, failing=1, findings=(entry_of(finding),))
    return None
