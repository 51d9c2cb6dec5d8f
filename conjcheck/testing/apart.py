"""Work done in a copy of this process: whatever a rule does there (end it, hang, eat memory, print), this one lives on and says so."""

import contextlib
import io
import os
import pickle
import select
import signal
import struct
import sys
import warnings
from collections.abc import Callable
from time import monotonic
from typing import Any, NoReturn, TypeVar

from conjcheck.errors import ConjcheckError
from conjcheck.testing.limits import let_exit

__all__ = ["Lost", "apart"]

_Result = TypeVar("_Result")
_HEAD = struct.Struct("Q")


class Lost(Exception):
    """The copy gave no result; the message says how it ended."""


def apart(work: Callable[[], _Result], *, seconds: float, shared: tuple[Any, ...] = ()) -> _Result:
    """The result of some work that calls a rule, done in a forked copy of this process; where there is no fork, done here.

    Args:
        work: called once; its result is pickled.
        seconds: after so long the copy is ended.
        shared: objects that the result may hold and that are passed by identity, such as a conjecture.

    Raises:
        Lost: the copy ended, or was ended, without a result.
        ConjcheckError: what the work raised.
    """
    if not hasattr(os, "fork"):
        return work()
    receiver, sender = os.pipe()
    sys.stdout.flush()
    sys.stderr.flush()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", DeprecationWarning)  # of a fork while there are threads
        child = os.fork()
    if not child:
        os.close(receiver)
        _work_and_end(work, sender, shared)
    os.close(sender)
    try:
        text = _received(receiver, monotonic() + seconds)
    finally:
        os.close(receiver)
        with contextlib.suppress(OSError):
            os.killpg(child, signal.SIGKILL)
        with contextlib.suppress(OSError):
            os.kill(child, signal.SIGKILL)
        _, status = os.waitpid(child, 0)
    if text is None:
        raise Lost(f"it took longer than {seconds:g} s")
    if len(text) < _HEAD.size or _HEAD.unpack_from(text)[0] != len(text) - _HEAD.size:
        code = os.waitstatus_to_exitcode(status)
        raise Lost(f"its process ended itself, with status {code}" if code >= 0 else f"its process was ended by signal {-code}")
    good, result = _Reader(io.BytesIO(text[_HEAD.size :]), shared).load()
    if good:
        found: _Result = result
        return found
    raise result if isinstance(result, ConjcheckError) else Lost(result)


class _Writer(pickle.Pickler):
    """Pickles, but for what both processes have."""

    def __init__(self, file: io.BytesIO, shared: tuple[Any, ...]) -> None:
        super().__init__(file)
        self.places = {id(thing): place for place, thing in enumerate(shared)}

    def persistent_id(self, thing: Any) -> int | None:
        return self.places.get(id(thing))


class _Reader(pickle.Unpickler):
    """Reads what a copy of this very process has written."""

    def __init__(self, file: io.BytesIO, shared: tuple[Any, ...]) -> None:
        super().__init__(file)
        self.shared = shared

    def persistent_load(self, place: int) -> Any:
        return self.shared[place]


def _work_and_end(work: Callable[[], Any], sender: int, shared: tuple[Any, ...]) -> NoReturn:
    """What the copy does."""
    try:
        os.setsid()
        let_exit()
        nothing = os.open(os.devnull, os.O_RDWR)
        for stream in (0, 1, 2):
            os.dup2(nothing, stream)
        sys.stdout = sys.stderr = os.fdopen(nothing, "w")
        try:
            found = True, work()
        except ConjcheckError as error:
            found = False, error
        except BaseException as error:
            found = False, f"it raised {type(error).__name__}: {error}"
        file = io.BytesIO()
        _Writer(file, shared).dump(found)
        with os.fdopen(sender, "wb") as out:
            out.write(_HEAD.pack(len(file.getvalue())) + file.getvalue())
    finally:
        os._exit(0)


def _received(receiver: int, deadline: float) -> bytes | None:
    """All that comes until the end; ``None`` if that is too late."""
    parts = []
    while (left := deadline - monotonic()) > 0:
        if not select.select([receiver], [], [], left)[0]:
            return None
        part = os.read(receiver, 1 << 16)
        parts.append(part)
        text = b"".join(parts) if not part or len(part) < 1 << 16 else b""
        if not part or (len(text) >= _HEAD.size and _HEAD.unpack_from(text)[0] == len(text) - _HEAD.size):
            return text
    return None
