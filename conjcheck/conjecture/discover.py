"""Where conjectures are found: in a module that was imported, and in installed packages that offer some."""

from importlib.metadata import EntryPoint, entry_points
from importlib.util import find_spec
from pathlib import Path
from types import ModuleType

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import DeclarationError

__all__ = ["GROUP", "conjectures_in", "installed_files"]

GROUP = "conjcheck.conjectures"
"""The entry-point group: ``[project.entry-points."conjcheck.conjectures"]`` with ``any_name = "package.module"``."""


def conjectures_in(module: ModuleType) -> list[Conjecture]:
    """The conjectures written in a module, in the order of the file; those it imported from elsewhere are not its own."""
    own = [value for value in vars(module).values() if isinstance(value, Conjecture) and value.rule.__module__ == module.__name__]
    return sorted(set(own), key=lambda conjecture: conjecture.line)


def installed_files() -> list[Path]:
    """The files of the modules that installed packages offer, without importing them.

    Raises:
        DeclarationError: an entry point that names no module with a source file.
    """
    return [_file(point) for point in entry_points(group=GROUP)]


def _file(point: EntryPoint) -> Path:
    try:
        spec = find_spec(point.module)
    except ImportError:
        spec = None
    if spec is None or not spec.origin or not Path(spec.origin).is_file():
        raise DeclarationError(
            f"expected a module with a source file for the entry point {point.name!r} of {GROUP}, got {point.value!r}"
        )
    return Path(spec.origin)
