"""Rules with open choices under pytest."""

import json

pytest_plugins = ["pytester"]

RULE = """
from conjcheck import ProjectiveSpaces, candidate

@candidate(on=ProjectiveSpaces(), variants={{"q": {values}}})
def powers(X, u, v, w, d, *, q):
    power = u.length + v.length
    return int(w.length == power % X.n and d == (q * (power // X.n),))
"""


def test_the_first_values_are_examined(project):
    """pytest examines the rule with its first values, as one conjecture, and passes or fails by them alone."""
    project.write("conjectures/right.py", RULE.format(values=(1, 0, 2)).replace("powers", "right"))
    project.write("conjectures/wrong.py", RULE.format(values=(0, 1, 2)).replace("powers", "wrong"))
    result = project.run("--conjcheck-effort", "quick")
    assert result.ret == 1
    assert project.table(result) == {"right": "agrees", "wrong": "refuted"}
    result.stdout.fnmatch_lines(["*refuted: wrong at Gr(1,2): (1) [*] (1) -> (), q^(1): rule 0, oracle 1 (minimal*"])
    result.stdout.fnmatch_lines(["*choice       q=0; 2 other variants*"])


def test_the_record_of_a_variant_is_that_of_its_first_values(project):
    """What is recorded is what the first values gave."""
    project.write("conjectures/wrong.py", RULE.format(values=(0, 1)).replace("powers", "wrong"))
    project.run("--conjcheck-effort", "quick", "--conjcheck-record")
    record = json.loads((project.path / "conjectures" / "records" / "wrong.json").read_text())
    assert record["conjecture"] == "wrong"
    assert "Gr(1,2): (1) * (1) -> (), q^(1)" in json.dumps(record)
