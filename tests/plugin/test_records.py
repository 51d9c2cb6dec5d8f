"""The life of a record, in real runs of pytest."""

import json

from sources import FAULT, PROJECTIVE, WRONG

pytest_plugins = ["pytester"]

RECORD = "conjectures/records/twice.json"


def test_written_verified_stale(project):
    """A refutation is written on request, verified by later runs, which pass, and is stale when the rule is repaired."""
    project.write("conjectures/twice.py", WRONG.format(name="twice"))
    first = project.run("--conjcheck-record")
    assert first.ret == 1
    text = (project.path / RECORD).read_text()
    data = json.loads(text)
    assert (data["conjecture"], data["status"]) == ("twice", "refuted")
    (found,) = data["counterexamples"]
    assert found.pop("rule_hash") == data["rule"]
    assert found | {"certificate": None, "instead": None} == {
        "where": FAULT,
        "rule": 2,
        "oracle": 1,
        "minimal": True,
        "certificate": None,
        "instead": None,
    }
    reach = [(entry["space"], entry["rows"], entry["seen"], entry["of"], entry["cases"]) for entry in data["coverage"]]
    assert reach == [("Gr(1,3)", 9, 9, 9, 9), ("Gr(1,4)", 13, 13, 16, 13)], "what the report calls compared"
    assert (data["statement"], data["ring"], data["premise"]) == ("h^n = q", "quantum", False)
    assert data["rule"].startswith("sha256:")

    second = project.run("-v", "--junitxml=out.xml", "--conjcheck-record", "-k", "recorded or survey")
    second.assert_outcomes(passed=2)
    second.stdout.fnmatch_lines(["conjectures/twice.py::twice::recorded PASSED*", "conjectures/twice.py::twice::survey PASSED*"])
    assert project.table(second) == {"twice": "refuted"}
    second.stdout.fnmatch_lines(["*on record as refuted: this is the expected verdict*"])
    second.stdout.fnmatch_lines([f"refuted: twice at {FAULT}: rule 2, oracle 1 (minimal: all 22 smaller cases agree)"])
    assert {o["part"] for values in project.properties().values() for o in values} == {"recorded", "survey"}
    assert (project.path / RECORD).read_text() == text

    project.run("-k", "recorded", "--conjcheck-record")
    project.run("--conjcheck-case", FAULT, "--conjcheck-record")
    assert (project.path / RECORD).read_text() == text, "a certificate is not lost by looking again"

    project.write("conjectures/twice.py", PROJECTIVE.format(name="twice"))
    repaired = project.run()
    assert repaired.ret == 1
    lines = project.summary(repaired)
    assert (
        len([line for line in lines if "::recorded - stale record: expected twice to be refuted at Gr(1,4): (2) * (3)" in line])
        == 1
    )
    repaired.stdout.fnmatch_lines(
        ["*the rule and the oracle agree there now; if the rule was repaired, record it anew with --conjcheck-record*"]
    )
    assert "Traceback" not in repaired.text

    anew = project.run("--conjcheck-record", "-rP")
    anew.assert_outcomes(passed=2)
    anew.stdout.fnmatch_lines(["*1 counterexample on record refutes no more and was retired: Gr(1,4): (2) [*] (3) -> (1),*"])
    assert "budget ended" not in anew.text
    data = json.loads((project.path / RECORD).read_text())
    assert (data["status"], data["counterexamples"], len(data["coverage"])) == ("open", [], 2)
    assert [path.name for path in (project.path / RECORD).parent.iterdir()] == ["twice.json"]
    project.run("-k", "survey or recorded").assert_outcomes(passed=1, deselected=1)


def test_other_values(project):
    """A recorded value that is not the rule's any more, or an oracle's value that is not the oracle's, is stale too."""
    records = {"first": {"rule": 3, "oracle": 1}, "second": {"rule": 2, "oracle": 0}, "third": {"rule": 3, "oracle": None}}
    for name, values in records.items():
        project.write(f"conjectures/{name}.py", WRONG.format(name=name))
        entry = {"where": FAULT, "minimal": True} | values
        data = {"format": "conjcheck-record", "version": 1, "conjecture": name, "status": "refuted", "counterexamples": [entry]}
        project.write(f"conjectures/records/{name}.json", json.dumps(data))
    result = project.run("-k", "recorded")
    result.assert_outcomes(failed=3, deselected=3)
    assert all(" - stale record: expected rule " in line for line in project.summary(result))


def test_a_false_certificate(project):
    """A record that calls its counterexample minimal is stale when a smaller one turns up."""
    project.write(
        "conjectures/twice.py", WRONG.format(name="twice").replace("(2, 3))", "(2, 3)) + (X.n == 3 and u is v is X.point)")
    )
    for minimal in (True, False):
        entry = {"where": FAULT, "rule": 2, "oracle": 1, "minimal": minimal}
        data = {"format": "conjcheck-record", "version": 1, "conjecture": "twice", "status": "refuted", "counterexamples": [entry]}
        project.write(RECORD, json.dumps(data))
        result = project.run()
        if minimal:
            (line,) = project.summary(result)
            assert "::survey - stale record: " in line
            assert "Gr(1,3): (2) * (2)" in line
            again = project.run("--conjcheck-record", "-k", "survey")
            again.assert_outcomes(passed=1, deselected=1)
            known = json.loads((project.path / RECORD).read_text())["counterexamples"]
            assert [(entry["where"], entry["minimal"]) for entry in known] == [
                ("Gr(1,3): (2) * (2) -> (1), q^(1)", True),
                (FAULT, False),
            ], "recorded anew as the message says"
            project.run().assert_outcomes(passed=2)
        else:
            result.assert_outcomes(passed=2)


def test_the_coverage_of_a_rule_that_agrees(project):
    """What a survey compared is put on record, and not changed by another run; after a change of the rule the report calls it stale."""
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    record = project.path / "conjectures/records/powers.json"
    project.run("-k", "survey").assert_outcomes(passed=1, deselected=1)
    assert not record.exists(), "nothing is recorded without being asked for"
    project.run("--conjcheck-record").assert_outcomes(passed=2)
    text = record.read_text()
    data = json.loads(text)
    assert (data["status"], data["counterexamples"]) == ("open", [])
    entries = data["coverage"]
    assert [(entry["space"], entry["seen"]) for entry in entries] == [("Gr(1,3)", 9), ("Gr(1,4)", 16)]
    assert all(entry["seen"] == entry["of"] == entry["rows"] == entry["nonzero"] for entry in entries)
    assert not any(entry["failing"] for entry in entries)
    project.run("--conjcheck-record", "-k", "survey")
    assert record.read_text() == text

    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers") + "\n# another version\n")
    words = "coverage of 2 spaces, 25 rows, was computed for another version of the rule and counts no more"
    result = project.run("-k", "survey", "-rP")
    result.assert_outcomes(passed=1, deselected=1)
    result.stdout.fnmatch_lines([f"note         {words}"])
    project.run("--conjcheck-record", "-k", "survey", "-rP").stdout.no_fnmatch_line("*another version*")
    anew = json.loads(record.read_text())
    assert anew["rule"] != data["rule"]
    assert [entry["space"] for entry in anew["coverage"]] == ["Gr(1,3)", "Gr(1,4)"]
    project.run("-k", "survey", "-rP").stdout.no_fnmatch_line("*another version*")


def test_damaged(project):
    """A damaged record is one failing item of its conjecture with a clear line; other conjectures are examined."""
    damaged = {
        "torn": ("{", "expected JSON in UTF-8"),
        "other": ("[]", "this is not a record"),
        "newer": ('{"format": "conjcheck-record", "version": 7}', "expected version 1, got 7"),
    }
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    for name, (content, _) in damaged.items():
        project.write(f"conjectures/{name}.py", WRONG.format(name=name))
        project.write(f"conjectures/records/{name}.json", content)
    result = project.run()
    result.assert_outcomes(failed=3, passed=2)
    lines = sorted(project.summary(result))
    for line, (name, (_, words)) in zip(lines, sorted(damaged.items()), strict=True):
        assert line.startswith(f"FAILED conjectures/{name}.py::{name}::record - record cannot be used: ")
        assert words in line
        assert f"{name}.json" in line


def test_an_open_record_with_a_counterexample(project):
    """A record that is open refutes nothing in advance: the failure fails."""
    project.write("conjectures/twice.py", WRONG.format(name="twice"))
    entry = {"where": FAULT, "rule": 2, "oracle": 1, "minimal": True}
    data = {"format": "conjcheck-record", "version": 1, "conjecture": "twice", "status": "open", "counterexamples": [entry]}
    project.write(RECORD, json.dumps(data))
    result = project.run()
    assert result.ret == 1
    assert project.table(result) == {"twice": "refuted"}


def test_a_survey_that_does_not_get_there(project):
    """If the time does not suffice to reach the recorded counterexample, the survey passes and says so."""
    project.write(
        "conjectures/late.py",
        """
        import time
        from conjcheck import Varieties, candidate

        @candidate(on=Varieties("Gr(1,3)", "Gr(1,4)"))
        def late(X, u, v):
            if X.n == 3:
                time.sleep(0.1)
            total = u.length + v.length
            return {(X.of_length(total % X.n)[0], (total // X.n,)): 1 + (total == 6)}
        """,
    )
    entry = {"where": "Gr(1,4): (3) * (3) -> (2), q^(1)", "rule": 2, "oracle": 1, "minimal": False}
    data = {"format": "conjcheck-record", "version": 1, "conjecture": "late", "status": "refuted", "counterexamples": [entry]}
    project.write("conjectures/records/late.json", json.dumps(data))
    result = project.run("--conjcheck-budget=0.25")
    result.assert_outcomes(passed=2)
    assert project.table(result) == {"late": "refuted"}
    result = project.run("--conjcheck-budget=0.25", "-k", "survey", "-rP")
    result.stdout.fnmatch_lines(["note         on record as refuted; the budget ended before the counterexample"])


def test_what_cannot_be_recorded_is_a_note(project):
    """Where nothing can be written, the verdict stands, with a note that it is not on record."""
    project.write("conjectures/powers.py", PROJECTIVE.format(name="powers"))
    project.write("conjectures/twice.py", WRONG.format(name="twice"))
    project.write("conjectures/records", "a file where a folder should be")
    result = project.run("--conjcheck-record", "-k", "survey", "-rP")
    result.assert_outcomes(passed=1, failed=1, deselected=2)
    assert project.table(result) == {"powers": "agrees", "twice": "refuted"}
    assert result.text.count("not recorded: ") >= 2


def test_two_conjectures_of_one_name(project):
    """A second file with a function of the same name does not share the record of the first: it is told to rename one."""
    for name in ("first", "second"):
        project.write(f"conjectures/{name}.py", PROJECTIVE.format(name="powers"))
    project.run("conjectures/first.py", "-k", "survey", "--conjcheck-record").assert_outcomes(passed=1, deselected=1)
    text = (project.path / "conjectures/records/powers.json").read_text()
    result = project.run("conjectures/second.py", "--conjcheck-record")
    assert len(project.summary(result)) == 1
    assert "expected the record of powers in second.py, got that of powers in first.py" in result.text
    assert "rename one of the two functions" in result.text
    assert (project.path / "conjectures/records/powers.json").read_text() == text
