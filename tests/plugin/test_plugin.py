"""Options, collection, seeds and output of the pytest plug-in."""

import re
import shlex
import subprocess
import sys

import pytest
from sources import CLAIM, FAULT, PROJECTIVE, UNIT, WRONG

pytest_plugins = ["pytester"]


# -- collection --------------------------------------------------------------------------------------------------------


def test_broken_files(project):
    """Each file that cannot be used is one failing item with a clear first line; the rest goes on, also in search of doctests."""
    broken = {
        "syntax": ("def f(:\n", "cannot be imported: syntax.py: SyntaxError: "),
        "missing": (
            "import no_such_module\n",
            "cannot be imported: missing.py: ModuleNotFoundError: No module named 'no_such_module'",
        ),
        "declared": (
            "from conjcheck import candidate\n@candidate(on=5)\ndef rule(X, u, v): pass\n",
            "cannot be imported: declared.py: conjcheck.errors.DeclarationError: ",
        ),
        "empty": ("x = 1\n", "cannot be imported: empty.py: expected at least one @candidate or @claim in the file, got none"),
        "leaves": ("import sys\nsys.exit(0)\n", "cannot be imported: leaves.py: SystemExit: 0"),
        "error": ("raise ValueError('one\\ntwo')\n", "cannot be imported: error.py: "),
    }
    for name, (source, _) in broken.items():
        project.write(f"conjectures/{name}.py", source)
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    project.write(
        "conjectures/family.py",
        """
        from conjcheck import Grassmannians, candidate

        @candidate(on=Grassmannians().where(lambda X: 1 // 0))
        def family(X, u, v):
            return {}
        """,
    )
    result = project.run("-v", "--doctest-modules")
    assert result.ret == 1
    result.assert_outcomes(passed=2, failed=7)
    assert project.table(result) == {"powers": "agrees"}
    heads = {line.split(" - ")[0].removeprefix("FAILED "): line.split(" - ", 1)[1] for line in project.summary(result)}
    for name, (_, words) in broken.items():
        assert heads.pop(f"conjectures/{name}.py::import").startswith(words)
    assert heads.pop("conjectures/family.py::family::family").startswith("family cannot be listed: family.py: ZeroDivisionError")
    assert not heads
    assert "INTERNALERROR" not in result.text
    result.stdout.fnmatch_lines(["*declared.py:*: @candidate rule: expected a family for on, got on=5*"])


def test_no_duplicates(project):
    """Whatever is named on the command line, every item is collected once, conjectures that are imported elsewhere included."""
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    project.write("conjectures/test_named.py", PROJECTIVE.format(name="named") + "\ndef test_plain():\n    pass\n")
    project.write("conjectures/deep/other.py", "from powers import powers\n" + CLAIM.format(name="other"))
    project.write("conjectures/conftest.py", "import sys, pathlib\nsys.path.insert(0, str(pathlib.Path(__file__).parent))\n")
    project.write("tests/test_own.py", PROJECTIVE.format(name="own") + "\ndef test_more():\n    assert own\n")
    own = ["tests/test_own.py::own::laws", "tests/test_own.py::own::survey", "tests/test_own.py::test_more"]
    named = [f"conjectures/test_named.py::{part}" for part in ("named::laws", "named::survey", "test_plain")]
    powers = [f"conjectures/powers.py::powers::{part}" for part in ("laws", "survey")]
    everything = sorted([*own, *named, *powers, "conjectures/deep/other.py::other::survey"])
    assert sorted(project.items(".")) == everything
    assert sorted(project.items("conjectures", "conjectures/powers.py")) == sorted(set(everything) - set(own))
    assert project.items("conjectures/powers.py::powers", "conjectures/test_named.py") == powers + named
    result = project.run("-q")
    result.assert_outcomes(passed=len(everything))


@pytest.mark.parametrize("mode", ["prepend", "importlib"])
def test_two_files_of_one_name(project, mode):
    """Plug-ins of one base name in two folders: each is judged, with the helper beside it."""
    for folder, right in (("a", 1), ("b", 2)):
        project.write(f"conjectures/{folder}/_values.py", f"VALUE = {right}\n")
        project.write(
            f"conjectures/{folder}/same.py",
            """
            from _values import VALUE
            from conjcheck import Varieties, candidate

            @candidate(on=Varieties("Gr(1,2)"))
            def same(X, u, v):
                total = u.length + v.length
                return {(X.of_length(total % X.n)[0], (total // X.n,)): VALUE}
            """,
        )
    result = project.run(f"--import-mode={mode}", "-v")
    result.stdout.fnmatch_lines(["conjectures/a/same.py::same::survey PASSED*"])
    lines = project.summary(result)
    assert lines
    assert all("conjectures/b/same.py::same::" in line and "rule 2, oracle 1" in line for line in lines)
    assert sorted(project.table(result).values()) == ["agrees", "refuted"]


def test_a_folder_on_the_command_line(project):
    """A folder named there that is called like a folder of plug-ins is one, wherever it lies; of any other the run says what to do."""
    project.write("far/conjectures/powers.py", PROJECTIVE.format(name="powers"))
    project.write("ideas/others.py", PROJECTIVE.format(name="others"))
    assert {node.split("::")[1] for node in project.items("far/conjectures")} == {"powers"}
    assert project.items() == []
    for named, missed in ((".", "far/conjectures/powers.py"), ("far", "far/conjectures/powers.py"), ("ideas", "ideas/others.py")):
        place = project.path / missed
        words = (
            f"conjcheck: {place} is not collected: name its folder on the command line, pytest -o conjcheck_folders={place.parent} "
        )
        assert words in project.run("--collect-only", "-q", named).text
        words = ["-o", f"conjcheck_folders={place.parent}", str(place.parent)]
        assert project.items(*words)
        assert project.run("--collect-only", *words).ret == 0
    assert "not collected" not in project.run("--collect-only", "-q", "far/conjectures").text
    assert "not collected" not in project.run("--collect-only", "-q", "far/conjectures", "-k", "nothing").text
    assert "not collected" not in project.run("--collect-only", "-q", "ideas", "-o", "python_files=*.py", "-k", "nothing").text


def test_other_folders(project):
    """The ini key names the folders of plug-ins; files elsewhere are left alone."""
    project.ini("conjcheck_folders = rules more/rules")
    for place in ("rules", "more/rules", "conjectures"):
        project.write(f"{place}/{place.replace('/', '_')}.py", PROJECTIVE.format(name="powers"))
    assert sorted(project.items()) == [
        f"{file}::powers::{part}" for file in ("more/rules/more_rules.py", "rules/rules.py") for part in ("laws", "survey")
    ]


def test_installed(project, monkeypatch):
    """Conjectures that installed packages offer are collected on request, once, and broken offers are refused."""
    info = project.path / "site" / "made_up-1.0.dist-info"
    project.write("site/made_up-1.0.dist-info/METADATA", "Metadata-Version: 2.1\nName: made-up\nVersion: 1.0\n")
    project.write(
        "site/made_up-1.0.dist-info/entry_points.txt",
        "[conjcheck.conjectures]\none = made_up_rules.powers\ntwo = made_up_rules.powers\n",
    )
    project.write("site/made_up_rules/__init__.py", "")
    project.write("site/made_up_rules/powers.py", PROJECTIVE.format(name="powers"))
    project.write("conjectures/unit.py", UNIT.format(name="unit"))
    monkeypatch.setenv("PYTHONPATH", str(project.path / "site"))
    project.ini("testpaths = conjectures")
    for more in ((), ("-n", "2")):
        result = project.run("--conjcheck-installed", "-q", *more)
        assert project.table(result) == {"powers": "agrees", "unit": "agrees"}
        result.assert_outcomes(passed=5)
    info.joinpath("entry_points.txt").write_text("[conjcheck.conjectures]\nbroken = made_up_rules.absent\n")
    broken = project.run("--conjcheck-installed")
    assert broken.ret == 4
    broken.stderr.fnmatch_lines(["*expected a module with a source file for the entry point 'broken'*"])
    assert "Traceback" not in broken.stderr.str() + broken.text


# -- choosing, stopping, repeating -------------------------------------------------------------------------------------


def test_choosing(project):
    """Choosing by word, by marker, stopping at the first failure and repeating the last failures work as for any test."""
    project.write("conjectures/a_twice.py", WRONG.format(name="twice"))
    project.write("conjectures/b_unit.py", UNIT.format(name="unit"))
    stopped = project.run("-x")
    assert stopped.parseoutcomes()["failed"] == 1  # by the laws, or, where these draw nothing wrong in time, by the survey
    assert project.table(stopped) == {"twice": "refuted"}
    last = project.run("--lf", "-v")
    assert last.parseoutcomes()["failed"] == 1
    assert project.table(last) == {"twice": "refuted"}
    by_word = project.run("-k", "unit and not laws", "-p", "no:cacheprovider")
    by_word.assert_outcomes(passed=2, deselected=3)
    by_marker = project.run("-m", "hypothesis", "-k", "unit", "-v")
    by_marker.assert_outcomes(passed=2, deselected=3)
    by_marker.stdout.fnmatch_lines_random(["*::unit::laws PASSED*", "*::unit::probe[[]n=4[]] PASSED*"])


def test_xdist(project):
    """With two processes the verdicts, the table and the properties are the same, and all draw with one seed."""
    project.write("conjectures/twice.py", WRONG.format(name="twice"))
    project.write("conjectures/unit.py", UNIT.format(name="unit"))
    project.write("conjectures/broken.py", "import no_such_module\n")
    result = project.run("-n", "2", "--junitxml=out.xml")
    assert result.ret == 1
    assert project.table(result) == {"twice": "refuted", "unit": "agrees"}
    assert any("::import - cannot be imported: broken.py: ModuleNotFoundError" in line for line in project.summary(result))
    outcomes = [o for values in project.properties().values() for o in values]
    assert {o["part"] for o in outcomes if o["conjecture"] == "unit"} == {"laws", "survey", "probe[n=4]"}
    assert len({o["seed"] for o in outcomes if "seed" in o}) == 1


LOGGING = """
import pathlib
from conjcheck import Varieties, candidate

LOG = pathlib.Path(__file__).parent.parent / "log.txt"


@candidate(on=Varieties("Fl(4)"), premise=lambda X, u, v: u is X.identity)
def logged(X, u, v):
    with LOG.open("a") as log:
        print(v, file=log)
    return {(v, (0, 0, 0)): 1}
"""


def test_seeds(project):
    """A seed repeats all draws; another seed gives others; the seed of a run is announced and repeats it."""
    project.write("conjectures/logged.py", LOGGING)
    log = project.path / "log.txt"

    def drawn(*args):
        log.unlink(missing_ok=True)
        result = project.run("-k", "laws or probe", *args)
        result.assert_outcomes(passed=2, deselected=1)
        (seed,) = re.findall(r"conjcheck \S+: seed (\d+) \(repeat with --hypothesis-seed=\1\)", result.text)
        return seed, log.read_text()

    first = drawn("--hypothesis-seed=11")
    assert first[0] == "11"
    assert drawn("--hypothesis-seed=11", "-p", "no:cacheprovider") == first
    free = drawn()
    assert free[1] != first[1]
    assert drawn(f"--hypothesis-seed={free[0]}")[1] == free[1]


# -- options -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("args", "ini", "words"),
    [
        (["--conjcheck-effort=lazy"], [], "*invalid choice: 'lazy'*"),
        (["--conjcheck-budget=soon"], [], "*invalid float value: 'soon'*"),
        (["--conjcheck-budget=0"], [], "*expected a number of seconds above 0 for conjcheck_budget, got '0.0'*"),
        (["--conjcheck-budget=nan"], [], "*expected a number of seconds above 0 for conjcheck_budget, got 'nan'*"),
        (["--conjcheck-call-limit=-1"], [], "*expected a number of seconds above 0 for conjcheck_call_limit, got '-1.0'*"),
        ([], ["conjcheck_call_limit = soon"], "*expected a number of seconds above 0 for conjcheck_call_limit, got 'soon'*"),
        ([], ["conjcheck_effort = lazy"], "*expected conjcheck_effort to be one of quick, normal, thorough, got 'lazy'*"),
    ],
    ids=range(7),
)
def test_bad_options(project, args, ini, words):
    """A bad value is a usage error that names the option, what was expected and what came, before anything runs."""
    (project.path / "conftest.py").unlink()
    project.write("test_it.py", "def test_it():\n    raise AssertionError('ran')\n")
    if ini:
        (project.path / "pytest.ini").write_text("\n".join(["[pytest]", *ini]) + "\n")
    result = project.pytester.runpytest_inprocess(*args)
    assert result.ret == 4
    result.stderr.fnmatch_lines([words])
    assert "ran" not in result.stdout.str()


def test_ini_and_command_line(project):
    """Ini keys count, the command line counts more, and ``--help`` lists them all."""
    project.write(
        "conjectures/slow.py",
        """
        import time
        from conjcheck import Varieties, candidate

        @candidate(on=Varieties("Gr(1,2)"))
        def slow(X, u, v):
            time.sleep(0.4)
            total = u.length + v.length
            return {(X.of_length(total % X.n)[0], (total // X.n,)): 1}
        """,
    )
    (project.path / "pytest.ini").write_text("[pytest]\nconjcheck_effort = quick\nconjcheck_call_limit = 0.2\n")
    result = project.run("-k", "survey")
    result.stdout.fnmatch_lines(["too-slow: slow at Gr(1,2): () * (): one call took longer than 0.2 s"])
    result = project.run("-k", "survey", "--conjcheck-call-limit=5", "--conjcheck-budget=0.1", "-rP")
    result.assert_outcomes(passed=1, deselected=1)
    result.stdout.fnmatch_lines(["agrees: slow as far as checked: the first * of 4 rows of Gr(1,2); *"])
    help_ = project.run("--help")
    for name in ("effort", "budget", "call-limit", "case", "cross-check", "record", "installed"):
        help_.stdout.fnmatch_lines([f"*--conjcheck-{name}*"])
    for name in ("folders", "effort", "budget", "call_limit"):
        help_.stdout.fnmatch_lines([f"*conjcheck_{name} (*"])


# -- output ------------------------------------------------------------------------------------------------------------


def test_quiet_runs(project):
    """Quiet runs keep the table, ``--no-summary`` drops the reports, and without a terminal the exit code alone tells."""
    project.write("conjectures/twice.py", WRONG.format(name="twice"))
    quiet = project.run("-q")
    assert project.table(quiet) == {"twice": "refuted"}
    none = project.run("--no-summary")
    assert none.ret == 1
    assert "FAILURES" not in none.text
    assert not project.summary(none)
    silent = project.run("-p", "no:terminal")
    assert silent.ret == 1
    assert silent.text.strip() == ""
    assert silent.stderr.str().strip() == ""


def test_nothing_of_ours(project):
    """A project without conjectures sees nothing of the plug-in and pays next to nothing: no numpy, no Hypothesis, none of our rooms."""
    (project.path / "conftest.py").unlink()
    project.write(
        "test_plain.py",
        """
        import sys

        def test_plain():
            rooms = [name for name in sys.modules if name.startswith("conjcheck.")]
            assert sorted(rooms) == ["conjcheck.pytest_plugin", "conjcheck.pytest_state"]
            assert "numpy" not in sys.modules
            assert "hypothesis" not in sys.modules
        """,
    )
    result = project.run("-p", "no:hypothesispytest")
    result.assert_outcomes(passed=1)
    assert "conjectures" not in result.text
    assert "seed" not in result.text
    assert project.run("--collect-only", "-k", "nothing_of_this_name").ret == 5


def test_importing_is_cheap():
    """``import conjcheck`` loads neither numpy nor Hypothesis nor pytest; the public names come when they are used."""
    source = (
        "import sys, conjcheck\n"
        "heavy = {'numpy', 'hypothesis', 'pytest'} & set(sys.modules)\n"
        "assert not heavy, heavy\n"
        "assert 'conjcheck.geometry.case' not in sys.modules\n"
        "assert set(conjcheck.__all__) <= set(dir(conjcheck))\n"
        "assert all(getattr(conjcheck, name) is not None for name in conjcheck.__all__)\n"
    )
    subprocess.run([sys.executable, "-W", "error", "-c", source], check=True)


def test_unknown_names():
    """A public name that does not exist is an AttributeError that says so."""
    import conjcheck

    with pytest.raises(AttributeError, match="module 'conjcheck' has no attribute 'conjecture_of_everything'"):
        conjcheck.conjecture_of_everything  # noqa: B018


def test_without_the_plugin_of_hypothesis(project):
    """Drawing parts run without the pytest plug-in of Hypothesis, too."""
    project.write("conjectures/unit.py", UNIT.format(name="unit"))
    result = project.run("-p", "no:hypothesispytest")
    result.assert_outcomes(passed=3)
    assert project.table(result) == {"unit": "agrees"}


def test_a_broken_file_is_in_the_table(project):
    """The final table names a file that cannot be imported, also when nothing else ran."""
    project.write("conjectures/lost.py", "import no_such_module\n")
    line = next(line for line in project.run().outlines if line.startswith("lost.py "))
    assert re.split(r"\s{2,}", line) == [
        "lost.py",
        "no verdict",
        "cannot be used: ModuleNotFoundError: No module named 'no_such_module'",
    ]


def test_replay_from_elsewhere(project, monkeypatch):
    """The replay line works where pytest was called: below the root directory, above it, and beside it."""
    project.write("my rules/conjectures/twice.py", WRONG.format(name="twice"))
    (project.path / "pytest.ini").rename(project.path / "my rules" / "pytest.ini")
    (project.path / "beside").mkdir()
    file = project.path / "my rules" / "conjectures" / "twice.py"
    for here, shown in (
        (project.path, "my rules/conjectures/twice.py"),
        (file.parent, "twice.py"),
        (project.path / "beside", str(file)),
    ):
        monkeypatch.chdir(here)
        result = project.run(str(file), "-k", "survey")
        replay = next(line for line in result.outlines if line.startswith("replay"))
        words = shlex.split(replay.removeprefix("replay"))
        assert words == ["pytest", f"{shown}::twice", "--conjcheck-case", FAULT]
        again = project.run(*words[1:])
        again.assert_outcomes(failed=1)
