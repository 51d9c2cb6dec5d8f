"""``conjcheck start``: a plug-in file that runs at once, to be turned into one's own rule; and a workflow for a shared repository."""

from __future__ import annotations

import ast
import keyword
import shlex
import sys
import tomllib
from difflib import get_close_matches
from pathlib import Path
from typing import TYPE_CHECKING

import click

from conjcheck.cli.common import Stop, complete_space, space_named
from conjcheck.errors import ConjcheckError

if TYPE_CHECKING:
    from conjcheck.geometry.families import Family

__all__ = ["command"]

_IGNORED = ".ledger.sqlite*"
_PLACE = "./conjcheck"
_VIEWS = ("partition", "permutation", "string", "signed", "word", "descents")
_LOOKED_AT = 6

_PAGE = '''"""One line on {name}: what it counts, and when.

The rule in full, as in a paper: which objects are counted, and an example by hand. What stands here now is true, but not your rule:
the unit, sigma_e * sigma_v = sigma_v. Run it, then change it piece by piece, and run it after each change:

    pytest {path}

Source: a paper with the number of its theorem; or "none, ours".
"""

from conjcheck import {imports}

__all__ = ["{name}"]


@{role}(
    on={family},{members}
    premise=lambda X, u, v: u.length == 0,  # what the rule speaks about: here, u is the unit; without this line, every product
    statement=r"\\sigma_e * \\sigma_v = \\sigma_v",  # in LaTeX, for reports
    references=[],  # one string for each
    contributors=[],
)
def {name}({arguments}) -> {returns}:
    """One line: {counted}."""
    # X is the space: X.n, X.rank, X.marked, X.dim, X.classes, X.schubert({view}=...).
    # u, v, w are classes of X: u.length, u.dual, {views}.
    # {degree}
    # {called}
    return {answer}
'''

_WORKFLOW = """# Examines every conjecture of this repository at each push and each proposal of a change; written by "conjcheck start".
name: conjectures

on: [push, pull_request]

permissions:
  contents: read

env:
  # The place of your clone of conjcheck, as pip takes it: a folder of this repository (a submodule, say), or git+https://.../conjcheck.git
  CONJCHECK: {place}

jobs:
  examine:
    runs-on: ubuntu-latest
    steps:
      - uses: actions/checkout@v4
        with:
          submodules: true
      - uses: actions/setup-python@v5
        with:
          python-version: "3.12"
      - name: Install
        run: python -m pip install "$CONJCHECK"{too}
      - name: Examine
        run: pytest {quoted} --conjcheck-report report --junitxml report/conjectures.xml
      - name: Keep the report
        if: always()
        uses: actions/upload-artifact@v4
        with:
          name: report
          path: report
"""


@click.command("start", short_help="Write a plug-in file that runs at once.")
@click.argument("name", required=False)
@click.option(
    "--on",
    "about",
    multiple=True,
    metavar="FAMILY",
    shell_complete=lambda *asked: complete_family(*asked) + complete_space(*asked),
    help="What it speaks about: Grassmannians, StepFlags(2), ...; or spaces, --on 'Gr(2,5)' --on 'Fl(4)'.",
)
@click.option(
    "--folder",
    type=click.Path(file_okay=False, path_type=Path),
    default=Path("conjectures"),
    show_default=True,
    help="Where the plug-in files are.",
)
@click.option("--claim", is_flag=True, help="A statement about constants, instead of a formula for them.")
@click.option("--products", is_flag=True, help="One call answers for a whole product (X, u, v), usually much faster.")
@click.option("--workflow", is_flag=True, help="Write a workflow file, too, or alone: pytest on the folder at each push.")
@click.option(
    "--workflow-folder",
    type=click.Path(file_okay=False, path_type=Path),
    default=Path(".github/workflows"),
    show_default=True,
    help="Where workflow files are.",
)
def command(
    name: str | None,
    about: tuple[str, ...],
    folder: Path,
    workflow_folder: Path,
    *,
    claim: bool,
    products: bool,
    workflow: bool,
) -> None:
    """Write a plug-in file for a rule called NAME, a page with hints that runs at once.

    What it says at first is true but nothing new, the unit of the product. Run it, put your rule in its place, run it again. No file is
    ever overwritten. --workflow is for a repository that several people share: at each push every conjecture is examined, and the report
    kept.

    \b
    Examples:
      conjcheck start my_rule --on Grassmannians
      conjcheck start my_products --on "StepFlags(2)" --products
      conjcheck start my_claim --on "Gr(2,5)" --on "Fl(4)" --claim
      conjcheck start --workflow

    Exit status: 0 written; 2 wrong usage, or a file of that name is there.
    """  # noqa: D301  # click knows the character, not the two letters
    if name is None and not workflow:
        raise click.UsageError(
            "expected a NAME for the rule, or --workflow, got neither; write conjcheck start my_rule --on Grassmannians"
        )
    if name is None and (about or claim or products):
        raise click.UsageError("expected a NAME together with --on, --claim or --products, got none")
    pages = {}
    if name is not None:
        path = folder / f"{name}.py"
        _check_name(name, folder)
        pages[path] = _page(name, about, path, claim=claim, products=products)
    if workflow:
        pages[workflow_folder / "conjectures.yml"] = _workflow(folder)
    for path in pages:
        if path.exists():
            raise Stop(f"expected a new file, got {path}, which is there; choose another name, or edit that file")
    for path, text in pages.items():
        try:
            path.parent.mkdir(parents=True, exist_ok=True)
            with path.open("x", encoding="utf-8") as file:
                file.write(text)
        except OSError as error:
            raise Stop(f"expected a file that can be written, got {path}: {error.strerror}") from error
        click.echo(f"wrote {path}")
    if name is not None:
        if ignored := _ignore_ledger(folder):
            click.echo(f"wrote {ignored}")
        click.echo(f"next: pytest {shlex.quote(f'{folder / name}.py')} --conjcheck-effort quick")
    if workflow and f"CONJCHECK: {_PLACE}" in pages[workflow_folder / "conjectures.yml"]:
        click.echo(f"next: in {workflow_folder / 'conjectures.yml'}, put the place of your clone of conjcheck at CONJCHECK")


def _ignore_ledger(folder: Path) -> Path | None:
    """See to it that the ledger of a survey in this folder is not committed; the file that was written to, if one had to be."""
    path = folder / ".gitignore"
    try:
        text = path.read_text(encoding="utf-8") if path.exists() else ""
        if any(line.strip().startswith(".ledger.sqlite") for line in text.splitlines()):
            return None
        with path.open("a", encoding="utf-8") as file:
            file.write(("\n" if text and not text.endswith("\n") else "") + f"{_IGNORED}\n")
    except (OSError, UnicodeDecodeError) as error:
        raise Stop(f"expected a file that can be written, got {path}: {error}; write the line {_IGNORED} yourself") from error
    return path


def _check_name(name: str, folder: Path) -> None:
    """Refuse a name that cannot be the name of a function and of a file that Python imports."""
    if not name.isidentifier() or keyword.iskeyword(name):
        remedy = "".join(letter if letter.isalnum() else "_" for letter in name).strip("_")
        hint = f"; write {remedy}" if remedy.isidentifier() and not keyword.iskeyword(remedy) else ""
        raise Stop(f"expected a name that Python can use for a function, such as my_rule, got {name!r}{hint}")
    if name.startswith("_") or name == "conftest":
        raise Stop(f"expected a name of a plug-in, got {name!r}: pytest takes such files for helpers; choose another name")
    if name in sys.stdlib_module_names or name in ("conjcheck", "hypothesis", "numpy", "pytest"):
        raise Stop(f"expected a name that hides no module, got {name!r}; choose another name, such as {name}_rule")
    from conjcheck import __all__ as public

    if name in public:
        raise Stop(f"expected a name that conjcheck itself does not use, got {name!r}; choose another name, such as {name}_rule")
    if (record := folder / "records" / f"{name}.json").exists():
        raise Stop(f"expected a name without a record, got {name!r}: {record} is about another rule; choose another name")


def _page(name: str, about: tuple[str, ...], path: Path, *, claim: bool, products: bool) -> str:
    """The text of a plug-in file."""
    family, code, imported = _family(about)
    members = [X for _, X in zip(range(_LOOKED_AT), family, strict=False)]
    views = [view for view in _VIEWS if all(_has(X.point, view) for X in members)]
    steps = {len(X.marked) for X in members}
    entries = f"{steps.pop()} entries" if len(steps) == 1 else "one entry for each q, len(X.marked) of them"
    entries = "1 entry" if entries == "1 entries" else entries
    role, asked = ("claim", ", N: Callable[..., int]") if claim else ("candidate", "")
    pair = "X: FlagVariety, u: SchubertClass, v: SchubertClass"
    if claim and products:
        answer = "N.product(u, v) == {(v, (0,) * len(X.marked)): 1}"
        called = "N.product(u, v) is the true product, a mapping from (w, d) to counts. The claim returns whether it holds."
        arguments, returns = f"{pair}, N: Any", "bool"
    elif claim:
        answer = "N(u, v, w, d) == int(w == v and not any(d))"
        called = (
            "N(u, v, w, d) is the true constant; N(v, u, w, d) or any other may be asked, too. The claim returns whether it holds."
        )
        arguments, returns = f"{pair}, w: SchubertClass, d: tuple[int, ...]{asked}", "bool"
    elif products:
        answer = "{(v, (0,) * len(X.marked)): 1}"
        called = "What the mapping leaves out is 0; a value may be a list of the objects themselves, which are then counted."
        arguments, returns = pair, "dict[tuple[SchubertClass, tuple[int, ...]], int]"
    else:
        answer = "int(w == v and not any(d))"
        called = (
            "Called where l(u) + l(v) = l(w) + sum d_i deg q_i. Return a count, or a list of the objects, which are then counted."
        )
        arguments, returns = f"{pair}, w: SchubertClass, d: tuple[int, ...]", "int"
    text = _PAGE.format(
        name=name,
        path=shlex.quote(path.as_posix()),
        imports=", ".join(sorted({"FlagVariety", "SchubertClass", imported, role}, key=_import_key)),
        role=role,
        family=code,
        members="" if imported == "Varieties" else f"  # {', '.join(X.name for X in members)}" + ("" if _ends(family) else ", ..."),
        arguments=arguments,
        returns=returns,
        counted="what is claimed" if claim else "what is counted",
        view=views[0],
        views=", ".join(f"u.{view}" for view in views),
        degree=f"d is a tuple with {entries}." if not products else f"The degree d in a key (w, d) is a tuple with {entries}.",
        called=called,
        answer=answer,
    )
    extra = "from collections.abc import Callable\n\n" if claim and not products else "from typing import Any\n\n" if claim else ""
    return text.replace("\nfrom conjcheck import", f"\n{extra}from conjcheck import", 1)


def _import_key(name: str) -> tuple[bool, str]:
    """Classes before functions, as import sorters have it."""
    return name.islower(), name


def _ends(family: Family) -> bool:
    """Whether a family has no more members than are looked at."""
    return len([X for _, X in zip(range(_LOOKED_AT + 1), family, strict=False)]) <= _LOOKED_AT


def _has(u: object, view: str) -> bool:
    """Whether a class can be shown that way."""
    try:
        getattr(u, view)
    except (ConjcheckError, AttributeError):
        return False
    return True


def _family(about: tuple[str, ...]) -> tuple[Family, str, str]:
    """The family of ``--on``, how a file writes it, and the name it imports for that."""
    from conjcheck.geometry import families

    if not about:
        raise click.UsageError("expected a family, --on Grassmannians, or a space, --on 'Gr(2,5)', got none")
    known = _family_names()
    word = about[0].split("(")[0].strip()
    exact = next((name for name in known if name.lower() == word.lower()), None)
    if exact is None:
        close = get_close_matches(word.lower(), [name.lower() for name in known], n=1)
        if close and "(" not in about[0] and "/" not in about[0]:
            raise Stop(f"expected a family or a space for --on, got {about[0]!r}; did you mean {_exactly(close[0])}?")
        spaces = [space_named(name) for name in about]
        return families.Varieties(*spaces), f"Varieties({', '.join(_quoted(X.name) for X in spaces)})", "Varieties"
    if len(about) > 1:
        raise click.UsageError(f"expected one family, or spaces only, got --on {' --on '.join(about)}")
    rest = about[0].strip()[len(word) :].strip() or "()"
    try:
        call = ast.parse(f"{exact}{rest}", mode="eval").body
        assert isinstance(call, ast.Call)
        values = [ast.literal_eval(value) for value in call.args]
        named = {str(pair.arg): ast.literal_eval(pair.value) for pair in call.keywords}
        family: Family = getattr(families, exact)(*values, **named)
        next(iter(family))
    except (AssertionError, SyntaxError, ValueError, TypeError, ConjcheckError, StopIteration) as error:
        example = "StepFlags(2)" if exact == "StepFlags" else f"{exact}()"
        raise Stop(f"expected a family such as {example} for --on, got {about[0]!r}: {error}") from error
    return family, f"{exact}{rest}", exact


def _family_names() -> list[str]:
    """The functions that make families without being told their members."""
    from conjcheck.geometry import families

    return [name for name in families.__all__ if name not in ("Family", "Varieties")]


def complete_family(_context: click.Context, _parameter: click.Parameter, incomplete: str) -> list[str]:
    """The families that begin like this, for the completion of a shell."""
    return [name for name in _family_names() if name.lower().startswith(incomplete.lower()) and name != "StepFlags"]


def _exactly(lowered: str) -> str:
    return next(name for name in _family_names() if name.lower() == lowered)


def _quoted(text: str) -> str:
    return f'"{text}"'


def _workflow(folder: Path) -> str:
    """The text of a workflow file for a repository with this folder of conjectures."""
    try:
        here = tomllib.loads(Path("pyproject.toml").read_text(encoding="utf-8"))
    except (OSError, ValueError):
        here = {}
    project = here.get("project", {})
    own = isinstance(project, dict) and project.get("name") == "conjcheck"
    too = " ." if not own and ("project" in here or "build-system" in here) else ""  # the repository is a package, too
    return _WORKFLOW.format(quoted=shlex.quote(folder.as_posix()), place="." if own else _PLACE, too=too)
