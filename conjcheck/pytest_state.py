"""What the pytest plug-in keeps in the configuration of a run; standard library and pytest only."""

from pathlib import Path
from typing import Any

import pytest

__all__ = ["COLLECTED", "EFFORTS", "LINES", "NAMED", "STATE", "seconds"]

STATE = pytest.StashKey[dict[str, Any]]()
"""``seed`` of the run, and ``examinations`` by conjecture."""

LINES = pytest.StashKey[list[dict[str, Any]]]()
"""The outcomes so far, in JSON types, for the summary."""

NAMED = pytest.StashKey[list[Path]]()
"""The folders on the command line."""

COLLECTED = pytest.StashKey[set[Path]]()
"""The files that items come from."""

EFFORTS = ("quick", "normal", "thorough")


def seconds(config: pytest.Config, key: str) -> float | None:
    """A number of seconds from the command line or the ini file."""
    given = config.getoption(f"--{key.replace('_', '-')}")
    text = str(given) if given is not None else config.getini(key)
    if text == "":
        return None
    try:
        number = float(text)
    except ValueError:
        number = 0.0
    if not number > 0:
        raise pytest.UsageError(f"expected a number of seconds above 0 for {key}, got {text!r}")
    return number
