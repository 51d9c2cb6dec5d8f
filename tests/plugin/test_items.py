"""The items of a conjecture, in real runs of pytest."""

import json
import shlex

import pytest
from sources import CLAIM, FAULT, PROJECTIVE, UNIT, WRONG

pytest_plugins = ["pytester"]


def test_a_green_run(project):
    """Each conjecture has its parts as items; all pass; the table has a line each; junit holds the outcomes as JSON."""
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    project.write("conjectures/deep/unit.py", UNIT.format(name="unit"))
    project.write("conjectures/nonzero.py", CLAIM.format(name="nonzero"))
    project.write("conjectures/_helper.py", "raise RuntimeError('a helper is no plug-in')\n")
    result = project.run("-v", "--junitxml=out.xml", "--conjcheck-cross-check", "--hypothesis-show-statistics")
    items = [
        "conjectures/nonzero.py::nonzero::survey",
        "conjectures/powers.py::powers::laws",
        "conjectures/powers.py::powers::survey",
        "conjectures/deep/unit.py::unit::laws",
        "conjectures/deep/unit.py::unit::survey",
        "conjectures/deep/unit.py::unit::probe[[]n=4[]]",
    ]
    result.stdout.fnmatch_lines_random([f"{item} PASSED*" for item in items])
    result.assert_outcomes(passed=6)
    assert result.ret == 0
    assert project.table(result) == {"nonzero": "agrees", "powers": "agrees", "unit": "agrees"}
    result.stdout.fnmatch_lines(["*: seed * (repeat with --hypothesis-seed=*)"])
    result.stdout.fnmatch_lines_random([f"{item}:" for item in items if "survey" not in item])  # the statistics
    properties = project.properties()
    assert len(properties) == 6
    outcomes = {(o["conjecture"], o["part"]): o for values in properties.values() for o in values}
    assert len(outcomes) == 6
    survey = outcomes["powers", "survey"]
    assert (survey["status"], survey["rows"], survey["cases"], survey["nonzero"]) == ("agrees", 25, 25, 25)
    assert survey["verdict"] == (
        "agrees: powers as far as checked: all 2 spaces from Gr(1,3) to Gr(1,4); "
        "25 rows, 25 cases, 25 of them nonzero; this is the whole family"
    )
    assert "seed" not in survey
    assert outcomes["unit", "probe[n=4]"]["seed"] == outcomes["powers", "laws"]["seed"]


def test_a_refutation(project):
    """A wrong rule fails once, with the verdict as first line and the report below; its other parts are skipped; replay works."""
    project.write("conjectures/twice.py", WRONG.format(name="twice"))
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    result = project.run("--junitxml=out.xml", "--hypothesis-seed=1")
    verdict = f"refuted: twice at {FAULT}: rule 2, oracle 1 (minimal: all 22 smaller cases agree)"
    assert result.ret == 1
    result.assert_outcomes(passed=2, failed=1, skipped=1)
    assert project.table(result) == {"twice": "refuted", "powers": "agrees"}
    (line,) = project.summary(result)
    assert line.startswith("FAILED conjectures/twice.py::twice::")
    assert f" - {verdict}" in line
    lines = result.outlines
    assert verdict in lines
    assert "Traceback" not in result.text
    assert "You can reproduce" not in result.text
    assert "Falsifying" not in result.text
    assert "Failing test case" not in result.text
    failed = [o for values in project.properties().values() for o in values if o["status"] == "refuted"]
    (outcome,) = failed
    assert (outcome["where"], outcome["rule"], outcome["oracle"], outcome["minimal"]) == (FAULT, 2, 1, True)
    assert outcome["layer"].items() >= {"pairs": 1, "cases": 1, "orbits": 1, "complete": True}.items()

    replay = next(line for line in lines if line.startswith("replay"))
    words = shlex.split(replay.removeprefix("replay"))
    assert words == ["pytest", "conjectures/twice.py::twice", "--conjcheck-case", FAULT]
    again = project.run(*words[1:])
    again.assert_outcomes(failed=1)
    assert [line.split(" - ")[0] for line in project.summary(again)] == ["FAILED conjectures/twice.py::twice::case"]
    again.stdout.fnmatch_lines([f"refuted: twice at {FAULT}: rule 2, oracle 1 (smaller cases not looked at)"])
    agreeing = project.run("conjectures/powers.py", "--conjcheck-case", FAULT)
    agreeing.assert_outcomes(passed=1)
    agreeing.stdout.fnmatch_lines([f"agrees: powers as far as checked: the one case {FAULT}"])


@pytest.mark.parametrize(
    ("case", "words"),
    [
        ("nonsense", "expected a row such as"),
        ("Gr(2,4): (1) * (1)", "expected a case on Gr(1,3), Gr(1,4), the family of powers"),
        ("Gr(1,3): (1) * (1) -> ()", "expected a case with l(u) + l(v) = l(w) + sum d_i deg q_i"),
    ],
    ids=["nonsense", "another family", "degree axiom"],
)
def test_a_case_that_is_none(project, case, words):
    """A case that denotes nothing, or lies outside the family, is one failing item with a clear line, never an agreement."""
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    result = project.run("--conjcheck-case", case)
    result.assert_outcomes(failed=1)
    (line,) = project.summary(result)
    assert line.startswith(f"FAILED conjectures/powers.py::powers::case - {words}")
    assert "Traceback" not in result.text


def test_rules_in_trouble(project):
    """Rules and premises that crash, leave, skip, loop or ask fail with their status; nothing is skipped silently, nothing hangs."""
    header = "import sys, time, pytest\nfrom conjcheck import Varieties, candidate, product, OutsideDomain\n"
    bodies = {
        "crashed": "return 1 // 0",
        "leaves": "sys.exit(0)",
        "skips": "pytest.skip('not today')",
        "xfails": "pytest.xfail('not today')",
        "exits": "pytest.exit('not today')",
        "quits": "import os; os._exit(0)",
        "sleeps": "time.sleep(1000)",
        "half": "return 0.5",
        "asks": "return product(u, v)",
        "outside": "raise OutsideDomain('nowhere')",
    }
    for name, body in bodies.items():
        project.write(
            f"conjectures/{name}.py", f'{header}\n@candidate(on=Varieties("Gr(1,3)"))\ndef {name}(X, u, v):\n    {body}\n'
        )
    premises = {"premise_loops": "while True: pass", "premise_exits": "sys.exit(3)", "premise_skips": "pytest.skip('no')"}
    for name, body in premises.items():
        project.write(
            f"conjectures/{name}.py",
            f"{header}\ndef premise(X, u, v):\n    {body}\n\n"
            f'@candidate(on=Varieties("Gr(1,3)"), premise=premise)\ndef {name}(X, u, v):\n    return {{}}\n',
        )
    result = project.run("--conjcheck-call-limit=0.3")
    assert result.ret == 1
    statuses = {
        "crashed": "crashed",
        "leaves": "crashed",
        "skips": "crashed",
        "xfails": "crashed",
        "exits": "crashed",
        "quits": "crashed",
        "sleeps": "too-slow",
        "half": "not-a-count",
        "asks": "not-independent",
        "outside": "undefined",
        "premise_loops": "too-slow",
        "premise_exits": "crashed",
        "premise_skips": "crashed",
    }
    assert project.table(result) == statuses
    heads = {line.split("::")[1]: line.split(" - ")[1].split(":")[0] for line in project.summary(result)}
    assert heads == statuses
    outcomes = result.parseoutcomes()
    assert outcomes["failed"] == len(statuses)
    assert outcomes.get("passed", 0) == 0


def test_laws_alone_are_no_agreement(project):
    """Laws and probes without the survey give "no verdict", on the screen and in the JSON of pages, never "agrees"."""
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    result = project.run("-k", "laws")
    assert result.ret == 0
    assert project.table(result) == {"powers": "no verdict"}
    assert "the survey did not run, or not to its end; the laws hold around" in result.text


def test_a_rule_that_depends_on_what_was_asked_before(project):
    """A rule that is right when asked first, and wrong later on, is unstable, not refuted."""
    project.write(
        "conjectures/moody.py",
        """
        from conjcheck import ProjectiveSpaces, candidate

        asked = {}

        @candidate(on=ProjectiveSpaces())
        def moody(X, u, v, w, d):
            asked[X] = asked.get(X, 0) + 1
            right = u.length + v.length == w.length + d[0] * X.n
            return int(right) if asked[X] <= 2 else 1 - int(right)
        """,
    )
    result = project.run()
    assert project.table(result) == {"moody": "unstable"}
    assert "in a process that asks nothing else: agrees, value" in " ".join(result.text.split())


@pytest.mark.parametrize("premise", ["d == (0,)", "d == (1,)", "w.length <= 1", "u.length + w.length < 3", "v.index != w.index"])
@pytest.mark.parametrize("seed", [1, 2])
def test_a_right_rule_with_a_premise_on_cases(project, premise, seed):
    """A premise on cases that no symmetry respects, such as a diagnosis suggests, does not make a right rule fail in any part."""
    source = PROJECTIVE.format(name="powers").replace('"))\n', f'"), premise=lambda X, u, v, w, d: {premise})\n')
    project.write("conjectures/powers.py", source)
    result = project.run(f"--hypothesis-seed={seed}")
    result.assert_outcomes(passed=2, skipped=0)
    assert project.table(result) == {"powers": "agrees"}


def test_two_conjectures_of_one_name_in_one_file(project):
    """Python keeps the last one only: that is said, and fails."""
    project.write("conjectures/twice.py", PROJECTIVE.format(name="powers") + PROJECTIVE.format(name="powers"))
    result = project.run()
    assert result.ret == 1
    assert "expected one conjecture of each name, got 'powers' at lines" in result.text


def test_nothing_compared(project):
    """A conjecture whose premise never holds fails: its parts say that nothing was compared."""
    project.write(
        "conjectures/never.py",
        """
        from conjcheck import Grassmannians, candidate

        @candidate(on=Grassmannians(), premise=lambda X, u, v: False)
        def never(X, u, v):
            return {}
        """,
    )
    result = project.run("--conjcheck-effort=quick", "--conjcheck-budget=0.3")
    assert result.ret == 1
    assert project.table(result) == {"never": "undefined"}
    assert "agrees" not in result.text
    outcomes = result.parseoutcomes()
    assert outcomes["failed"] == 1
    assert outcomes.get("passed", 0) == 0


def test_names(project):
    """Every conjecture of a file is collected under the name it has there: from a factory, from a lambda, bound twice."""
    project.write(
        "conjectures/many.py",
        """
        from conjcheck import Varieties, candidate

        def make(k):
            @candidate(on=Varieties(f"Gr(1,{k})"))
            def rule(X, u, v):
                total = u.length + v.length
                return {(X.of_length(total % X.n)[0], (total // X.n,)): 1}
            return rule

        rule_2, rule_3 = make(2), make(3)
        short = candidate(on=Varieties("Gr(1,2)"))(lambda X, u, v: {})
        alias = rule_2

        @candidate(on=Varieties("Gr(1,2)"))
        def plain(X, u, v):
            return {}

        also_plain = plain
        """,
    )
    result = project.run("-v")
    table = project.table(result)
    assert {name: status for name, status in table.items() if name in ("rule_2", "rule_3", "short", "plain")} == {
        "rule_2": "agrees",
        "rule_3": "agrees",
        "short": "refuted",
        "plain": "refuted",
    }
    assert set(table) <= {"rule_2", "rule_3", "short", "plain", "alias"}
    assert not [line for line in result.outlines if "also_plain" in line]


def test_printing_and_warnings(project):
    """What a rule prints is captured; what it warns of does not decide, unless warnings are errors."""
    project.write(
        "conjectures/loud.py",
        """
        import warnings
        from conjcheck import Varieties, candidate

        @candidate(on=Varieties("Gr(1,2)"))
        def loud(X, u, v):
            print("words of the rule")
            warnings.warn("old ways")
            total = u.length + v.length
            return {(X.of_length(total % X.n)[0], (total // X.n,)): 1}
        """,
    )
    result = project.run()
    assert result.ret == 0
    assert result.parseoutcomes()["passed"] == 2
    assert "words of the rule" not in result.text
    strict = project.run("-W", "error")
    assert project.table(strict) == {"loud": "crashed"}


def test_the_oracle_at_import(project):
    """A file that asks the oracle while it is imported gets its verdict with a warning."""
    project.write(
        "conjectures/table.py",
        """
        from conjcheck import Gr, Varieties, candidate, product

        X3 = Gr(1, 3)
        TABLE = {(u, v): dict(product(u, v)) for u in X3.classes for v in X3.classes}

        @candidate(on=Varieties(X3))
        def table(X, u, v):
            return TABLE[u, v]
        """,
    )
    result = project.run("-rP", "--junitxml=out.xml")
    result.assert_outcomes(passed=2)
    result.stdout.fnmatch_lines(["note         *the oracle while it was imported*"])
    assert all("imported" in o["note"] for values in project.properties().values() for o in values)


def test_json_is_plain(project):
    """The property in junit is JSON with the words of the terminal, whatever characters a rule uses."""
    project.write(
        "conjectures/odd.py",
        """
        from conjcheck import Varieties, candidate

        @candidate(on=Varieties("Gr(1,2)"))
        def sonderfall_\u00e4(X, u, v):
            raise ValueError("\\x00 <&> \u2028 two\\nlines \\x1b[31m")
        """,
    )
    project.run("--junitxml=out.xml")
    (outcome,) = [o for values in project.properties().values() for o in values]
    assert outcome["status"] == "crashed"
    assert len(outcome["verdict"].splitlines()) == 1
    assert json.loads(json.dumps(outcome)) == outcome
