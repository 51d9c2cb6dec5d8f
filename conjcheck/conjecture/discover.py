"""Where conjectures are found: in a module that was imported, in a file, and in installed packages that offer some."""

import ast
import sys
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from importlib.machinery import EXTENSION_SUFFIXES, SOURCE_SUFFIXES, ExtensionFileLoader, FileFinder, SourceFileLoader
from importlib.metadata import EntryPoint, entry_points
from importlib.util import find_spec, module_from_spec, spec_from_file_location
from pathlib import Path
from types import CodeType, ModuleType

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import DeclarationError, RecordError
from conjcheck.evidence.source import keep_version, kept_version, source_files, version_of
from conjcheck.oracle.guard import Watch, askers, watched

__all__ = [
    "GROUP",
    "asked_while_imported",
    "conjectures_in",
    "conjectures_in_file",
    "declared_twice",
    "importing",
    "installed_files",
    "prefer_helpers_of",
]

GROUP = "conjcheck.conjectures"
"""The entry-point group: ``[project.entry-points."conjcheck.conjectures"]`` with ``any_name = "package.module"``."""


def conjectures_in(module: ModuleType) -> list[Conjecture]:
    """The conjectures written in a module, in the order of the file; those it imported from elsewhere are not its own."""
    own = [value for value in vars(module).values() if isinstance(value, Conjecture) and value.rule.__module__ == module.__name__]
    return sorted(set(own), key=lambda conjecture: conjecture.line)


def conjectures_in_file(path: Path) -> list[Conjecture]:
    """The conjectures written in a file, imported anew, in the order of the file; helpers beside it can be imported by their name.

    Raises:
        DeclarationError: no such file, a file that cannot be imported, or one without a conjecture.
    """
    if not path.is_file() or path.suffix != ".py":
        raise DeclarationError(f"expected a plug-in file such as conjectures/my_rule.py, got {path}")
    try:
        for helper in source_files(path):
            _import_from_source(helper.parent)
    except RecordError as error:
        raise DeclarationError(str(error)) from None
    name = f"conjcheck_file_{path.stem}"  # a name that hides no other module
    spec = spec_from_file_location(name, path.resolve(), loader=_FromSource(name, str(path.resolve())))
    assert spec is not None, "a .py file has a spec"
    assert spec.loader is not None, "and a loader"
    module = sys.modules[name] = module_from_spec(spec)
    try:
        with importing(path):
            spec.loader.exec_module(module)
    except (Exception, SystemExit) as error:
        del sys.modules[name]
        raise DeclarationError(f"{path}: cannot be imported: {type(error).__name__}: {error}") from error
    if twice := declared_twice(path):
        raise DeclarationError(twice)
    found = [conjecture.called(_name_in(module, conjecture)) for conjecture in conjectures_in(module)]
    if not found:
        raise DeclarationError(f"{path}: expected at least one @candidate or @claim, got none; decorate a function")
    return found


def declared_twice(path: Path) -> str:
    """What to say of a file that declares two conjectures of one name, of which Python keeps the last; empty if none does."""
    lines: dict[str, int] = {}
    for node in ast.parse(path.read_bytes()).body:
        if not isinstance(node, ast.FunctionDef):
            continue
        calls = [d.func for d in node.decorator_list if isinstance(d, ast.Call)]
        if not any((f.attr if isinstance(f, ast.Attribute) else getattr(f, "id", "")) in ("candidate", "claim") for f in calls):
            continue
        if node.name in lines:
            return (
                f"{path}: expected one conjecture of each name, got {node.name!r} at lines {lines[node.name]} and {node.lineno}; "
                "rename one of them"
            )
        lines[node.name] = node.lineno
    return ""


def _name_in(module: ModuleType, conjecture: Conjecture) -> str:
    """The name of the variable that holds a conjecture: its own, if that holds it."""
    names = [name for name, value in vars(module).items() if value is conjecture]
    return conjecture.name if conjecture.name in names else names[0]


class _FromSource(SourceFileLoader):
    """Compiles what the file says now. Cached bytecode of a version of the same second and length is taken by Python for current."""

    def get_code(self, fullname: str) -> CodeType:
        path = self.get_filename(fullname)
        code: CodeType = self.source_to_code(self.get_data(path), path)
        return code


def _import_from_source(folder: Path) -> None:
    """Let modules in a folder be compiled anew."""
    loaders = (ExtensionFileLoader, EXTENSION_SUFFIXES), (_FromSource, SOURCE_SUFFIXES)
    sys.path_importer_cache[str(folder)] = FileFinder(str(folder), *loaders)


@contextmanager
def importing(path: Path) -> Iterator[None]:
    """Around the import of a plug-in: the helpers beside it come first; which version this was is remembered.

    Raises:
        DeclarationError: the file, or one that it needs, was changed meanwhile.
    """
    prefer_helpers_of(path.parent.resolve())
    version = None
    with suppress(RecordError):  # no UTF-8: Python may read it all the same
        version = version_of(path)
    with watched(Watch(forbidding=False)):
        yield
    if version is not None:
        if changed := version.changed:
            raise DeclarationError(f"expected {changed} to stay as it is while {path} is imported, it was changed; start again")
        keep_version(path, version)


def asked_while_imported(conjecture: Conjecture) -> bool:
    """Whether its file, or one that this imports, asked the oracle while it was imported."""
    found = askers()
    with suppress(RecordError):  # it was written in no file
        return bool(found) and not found.isdisjoint(path for path, _, _ in kept_version(conjecture.file).files)
    return False


_shelves: dict[Path, dict[str, ModuleType]] = {}
"""For each folder of plug-ins the modules that were taken off ``sys.modules`` for another one's."""


def prefer_helpers_of(folder: Path) -> None:
    """Let the plug-ins of a folder import the modules beside them, and not those of the same name beside other plug-ins.

    Modules that were loaded from the folder of another plug-in, where this folder has one of that name, are put aside, and come back with
    that folder. To be called before a plug-in is imported, and again before its rules run: they may import, too.
    """
    if sys.path[0] == str(folder) and folder in _shelves:
        return
    _import_from_source(folder)
    if str(folder) in sys.path:
        sys.path.remove(str(folder))
    sys.path.insert(0, str(folder))
    own = _shelves.setdefault(folder, {})
    for name in {path.stem if path.suffix == ".py" else path.name for path in folder.iterdir()} - {"conftest"}:
        loaded = sys.modules.get(name)
        if loaded is not None and (other := _shelf_of(loaded)) is not None and other != folder:
            for known in [known for known in sys.modules if known == name or known.startswith(f"{name}.")]:
                _shelves[other][known] = sys.modules.pop(known)
    for name in list(own):
        sys.modules.setdefault(name, own.pop(name))


def _shelf_of(module: ModuleType) -> Path | None:
    """The folder of plug-ins from which a module, or a package, was loaded."""
    file = getattr(module, "__file__", None)
    if file and not file.endswith("__init__.py"):
        home = Path(file).parent
    else:
        home = next((Path(place).parent for place in getattr(module, "__path__", ())), Path())
    return home if home in _shelves else None


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
