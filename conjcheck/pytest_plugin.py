"""The pytest plug-in: a thin face. Every conjecture becomes a node with the items recorded, laws, survey and probe[n=...].

This module is imported by every pytest run on the machine, so it imports only the standard library and pytest; the work is
imported when the first conjecture is collected.
"""

from __future__ import annotations

import ast
import json
import os
import random
import shlex
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

from conjcheck.pytest_state import COLLECTED, EFFORTS, LINES, NAMED, STATE, seconds

if TYPE_CHECKING:
    from collections.abc import Generator

_FOLDERS = "conjcheck_folders"


def pytest_addoption(parser: pytest.Parser) -> None:
    """Options and ini keys; the command line wins over the ini file."""
    group = parser.getgroup("conjcheck", "conjcheck: candidate rules for quantum Schubert calculus")
    group.addoption(
        "--conjcheck-effort",
        choices=EFFORTS,
        help="how much work goes into each conjecture (default: the ini key conjcheck_effort, else normal)",
    )
    group.addoption(
        "--conjcheck-budget",
        type=float,
        metavar="SECONDS",
        help="seconds for the survey of each conjecture (default: the ini key conjcheck_budget, else 10 at normal effort)",
    )
    group.addoption(
        "--conjcheck-call-limit",
        type=float,
        metavar="SECONDS",
        help="seconds one call of a rule may take (default: the ini key conjcheck_call_limit, else 10)",
    )
    group.addoption("--conjcheck-case", metavar="CASE", help="compare only this case (or row), written as in a report")
    group.addoption("--conjcheck-cross-check", action="store_true", help="compute every product of the oracle in two ways")
    group.addoption("--conjcheck-record", action="store_true", help="write refutations to records/<name>.json beside the plug-in")
    group.addoption("--conjcheck-report", metavar="DIR", help="write a page (HTML) per conjecture to this folder, and an index")
    group.addoption("--conjcheck-installed", action="store_true", help="also collect the conjectures offered by installed packages")
    parser.addini(
        _FOLDERS, "folders whose .py files are plug-ins, relative to the root directory", type="args", default=["conjectures"]
    )
    parser.addini("conjcheck_effort", "quick, normal or thorough", default="normal")
    parser.addini("conjcheck_budget", "seconds for the survey of each conjecture", default="")
    parser.addini("conjcheck_call_limit", "seconds one call of a rule may take", default="10")


def pytest_configure(config: pytest.Config) -> None:
    """Choose the seed of the run, once, and pass the folders of installed plug-ins to the collection."""
    given = config.getoption("--hypothesis-seed", None)
    worker = getattr(config, "workerinput", {})
    config.stash[STATE] = {
        "seed": worker.get("conjcheck_seed", given if given is not None else random.randrange(2**32)),  # noqa: S311
        "examinations": {},
    }
    config.stash[LINES] = []
    effort = config.getini("conjcheck_effort")
    if effort not in EFFORTS:
        raise pytest.UsageError(f"expected conjcheck_effort to be one of {', '.join(EFFORTS)}, got {effort!r}")
    for key in ("conjcheck_budget", "conjcheck_call_limit"):
        seconds(config, key)
    if (folder := config.getoption("--conjcheck-report")) and not worker:
        try:
            (config.invocation_params.dir / folder).mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise pytest.UsageError(
                f"expected a folder that can be written for --conjcheck-report, got {folder!r}: {error}"
            ) from None
    if config.getoption("--conjcheck-installed"):
        from conjcheck.conjecture.discover import installed_files
        from conjcheck.errors import DeclarationError

        try:
            config.args.extend(str(path) for path in installed_files())
        except DeclarationError as error:
            raise pytest.UsageError(str(error)) from None


@pytest.hookimpl(optionalhook=True)
def pytest_configure_node(node: Any) -> None:
    """Under xdist, every worker draws with the seed of the controller."""
    node.workerinput["conjcheck_seed"] = node.config.stash[STATE]["seed"]


def pytest_report_collectionfinish(config: pytest.Config, items: list[pytest.Item]) -> str | None:
    """The seed of the run, so that it can be repeated; nothing if there is no conjecture."""
    module = sys.modules.get("conjcheck.pytest_items")
    if module is None or not any(isinstance(item, module.PartItem) for item in items):
        return None
    from importlib.metadata import version

    name = f"conjcheck {version('conjcheck')}"
    hypothesis = sys.modules.get("hypothesis")
    if hypothesis is not None and hypothesis.settings().derandomize and config.getoption("--hypothesis-seed", None) is None:
        return f"{name}: derandomized by the Hypothesis profile"
    seed = config.stash[STATE]["seed"]
    return f"{name}: seed {seed} (repeat with --hypothesis-seed={seed})"


# -- collection ----------------------------------------------------------------------------------------------------------


def _is_plugin_file(path: Path, config: pytest.Config) -> bool:
    """A .py file in a folder of conjectures, or of that name where the command line leads; with a leading underscore it is a helper."""
    if path.suffix != ".py" or path.name.startswith("_") or path.name == "conftest.py":
        return False
    place, folders = path.resolve(), [Path(folder) for folder in config.getini(_FOLDERS)]
    if any(config.rootpath.joinpath(folder).resolve() in place.parents for folder in folders):
        return True
    named = [folder for folder in _folders_named(config) if folder != config.rootpath.resolve()]
    return any(folder.name in {known.name for known in folders} and folder in place.parents for folder in named)


def _folders_named(config: pytest.Config) -> list[Path]:
    """The folders on the command line."""
    if NAMED not in config.stash:
        given = [config.invocation_params.dir / argument.split("::")[0] for argument in config.args]
        config.stash[NAMED] = [path.resolve() for path in given if os.path.isdir(path)]  # noqa: PTH112  # never raises
    return config.stash[NAMED]


def pytest_itemcollected(item: pytest.Item) -> None:
    """Remember where items come from, those included that are deselected later."""
    item.config.stash.setdefault(COLLECTED, set()).add(item.path)


def pytest_collection_finish(session: pytest.Session) -> None:
    """Say which folders on the command line hold conjectures that were not collected: nobody is to take silence for agreement."""
    config = session.config
    reporter = config.pluginmanager.get_plugin("terminalreporter")
    if reporter is None:
        return
    names, collected = sorted({Path(folder).name for folder in config.getini(_FOLDERS)}), config.stash.get(COLLECTED, set())
    for folder in _folders_named(config):
        places = [
            folder,
            *(folder / name for name in names),
            *(path for name in names for path in sorted(folder.glob(f"*/{name}"))),
        ]
        files = [path for place in places if os.path.isdir(place) for path in sorted(place.glob("*.py"))]  # noqa: PTH112  # never raises
        left = [path for path in files if path not in collected and not _is_plugin_file(path, config) and _declares(path)]
        if left:
            where = shlex.quote(str(left[0].parent))
            reporter.write_line(
                f"conjcheck: {left[0]} is not collected: name its folder on the command line, pytest -o {_FOLDERS}={where} {where}, "
                f"or in the ini key {_FOLDERS}",
                yellow=True,
            )


def _declares(path: Path) -> bool:
    """Whether a file is a plug-in by its text: a function under @candidate or @claim."""
    if path.name.startswith(("_", "test_")):
        return False
    try:
        text = path.read_text(encoding="utf-8", errors="replace")
        found = ast.parse(text).body if "conjcheck" in text else []
    except (OSError, SyntaxError, ValueError):
        return False
    calls = [d.func for node in found if isinstance(node, ast.FunctionDef) for d in node.decorator_list if isinstance(d, ast.Call)]
    return any(getattr(call, "attr", getattr(call, "id", "")) in ("candidate", "claim") for call in calls)


@pytest.hookimpl(wrapper=True)
def pytest_collect_file(file_path: Path, parent: pytest.Collector) -> Generator[None, list[Any], list[Any]]:
    """Plug-in files that pytest would not take by itself; and no second import of them in search of doctests."""
    found = yield
    if not _is_plugin_file(file_path, parent.config):
        return found
    modules = [node for node in found if isinstance(node, pytest.Module) and type(node).__name__ != "DoctestModule"]
    return modules or [pytest_pycollect_makemodule(file_path, parent)]


def pytest_pycollect_makemodule(module_path: Path, parent: pytest.Collector) -> pytest.Module | None:
    """The module of a plug-in file."""
    if not _is_plugin_file(module_path, parent.config):
        return None
    from conjcheck.pytest_items import PluginFile

    return PluginFile.from_parent(parent, path=module_path)


@pytest.hookimpl(tryfirst=True)
def pytest_pycollect_makeitem(collector: pytest.Module | pytest.Class, name: str, obj: object) -> Any:
    """A conjecture in any collected module becomes a node, once, in the module it was written in."""
    declare = sys.modules.get("conjcheck.conjecture.declare")
    if declare is None or not isinstance(obj, declare.Conjecture):
        return None
    module = collector.obj
    own = obj.rule.__module__ == getattr(module, "__name__", None)
    if not own or (name != obj.name and getattr(module, obj.name, None) is obj):
        return []
    from conjcheck.pytest_items import ConjectureNode

    return [ConjectureNode.from_parent(collector, name=name, conjecture=obj.called(name))]


# -- reports --------------------------------------------------------------------------------------------------------------


def pytest_runtest_logreport(report: pytest.TestReport) -> None:
    """Collect the outcomes; under xdist they arrive here too, as text."""
    if report.when == "call" and _config is not None:
        for key, value in report.user_properties:
            if key == "conjcheck":
                _config.stash[LINES].append(json.loads(str(value)))
            elif key == "conjcheck broken":
                _config.stash[STATE].setdefault("broken", []).append(json.loads(str(value)))


_config: pytest.Config | None = None


def pytest_sessionstart(session: pytest.Session) -> None:
    """Remember whose session this is: ``pytest_runtest_logreport`` is not told."""
    global _config  # noqa: PLW0603
    _config = session.config


def pytest_sessionfinish(session: pytest.Session) -> None:
    """Write the pages that were asked for; under xdist only the controller does, which has all outcomes."""
    config = session.config
    folder, lines, broken = config.getoption("--conjcheck-report"), config.stash[LINES], config.stash[STATE].get("broken", [])
    if not folder or not (lines or broken) or hasattr(config, "workerinput"):
        return
    from conjcheck.report.board import write_run

    try:
        write_run(config.invocation_params.dir / folder, lines, broken)
    except OSError as error:
        config.stash[STATE]["pages"] = f"the pages could not be written: {error}"
        session.exitstatus = session.exitstatus or pytest.ExitCode.INTERNAL_ERROR
    else:
        config.stash[STATE]["pages"] = f"pages: {folder}/index.html"


def pytest_terminal_summary(terminalreporter: Any, config: pytest.Config) -> None:
    """One line per conjecture; nothing if none ran."""
    lines, broken = config.stash[LINES], config.stash[STATE].get("broken", [])
    if not lines and not broken:
        return
    from conjcheck.report.text import summary_table

    terminalreporter.section("conjectures")
    for line in summary_table(lines, broken):
        terminalreporter.write_line(line)
    if pages := config.stash[STATE].get("pages"):
        terminalreporter.write_line(pages)
    texts = [text for report in terminalreporter.stats.get("passed", []) for title, text in report.sections if "conjcheck" in title]
    refuted = [text for text in texts if text.startswith("refuted: ")]
    if config.getoption("--conjcheck-case"):
        refuted = texts
    elif len({line["conjecture"] for line in lines}) > 1:
        refuted = []
    if refuted:
        terminalreporter.write_line("")
        terminalreporter.write_line(max(refuted, key=len))
    elif texts:
        terminalreporter.write_line("the whole report of each part that passed: -rP")
