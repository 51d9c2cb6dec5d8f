"""The command ``conjcheck survey``: what it prints, where, with which exit status, and that it goes on where it was."""

import json
import os
import pty
import re
import signal
import subprocess
import sys
import time

import pytest
from click.testing import CliRunner
from plugins import POWERS, marked, none_left, write

from conjcheck.cli import main

FAULTY = POWERS.replace(
    "    power =", "    if (X.n, u.length, v.length) in {(3, 1, 1), (3, 2, 0), (4, 0, 0)}:\n        return 7\n    power ="
)
SLOW = "import time\n" + POWERS.replace("    power =", "    time.sleep(0.02)\n    power =")


@pytest.fixture(autouse=True)
def nothing_is_left(monkeypatch, tmp_path):
    """After each test no process is left."""
    monkeypatch.setenv("CONJCHECK_TEST_MARK", tmp_path.name)
    yield
    assert none_left(tmp_path.name)


def run(*words):
    """The command in this process, with one process for the rule."""
    words = ["survey", *map(str, words)]
    return CliRunner().invoke(main, [*words, "--jobs", "1"] if "--jobs" not in words else words, catch_exceptions=False)


def command(*words):
    """The command line of the command as a process of its own."""
    return [sys.executable, "-m", "conjcheck", "survey", *map(str, words)]


def test_agreement(tmp_path):
    """Status 0; the verdict first, then a table with one line per space, then where it is recorded; nothing on standard error."""
    path = write(tmp_path, POWERS)
    done = run(path, "Gr(1,3)", "Gr(1,2)", "Gr(1,3)")
    assert (done.exit_code, done.stderr) == (0, "")
    assert done.stdout.startswith(
        "agrees: powers as far as checked: all of Gr(1,2), Gr(1,3); 13 rows, 13 cases, 13 of them nonzero\n"
    )
    table = [re.split("  +", line) for line in done.stdout.split("\n\n")[-1].split("\n")]
    assert table[0] == ["space", "rows", "of", "inside", "cases", "nonzero", "failing", "seconds", "engine"]
    assert [line[:7] for line in table[1:3]] == [["Gr(1,2)", *"44444", "0"], ["Gr(1,3)", *"99999", "0"]]
    assert done.stdout.endswith(f"recorded in {tmp_path / 'records' / 'powers.json'}\n")
    assert (tmp_path / ".ledger.sqlite").exists()
    again = run(f"{path}::powers", "Gr(1,2)", "Gr(1,3)")
    assert "13 of the rows were taken from the ledger" in again.stdout


def test_refutation(tmp_path):
    """Status 1, and the smallest failure; it is recorded."""
    done = run(write(tmp_path, FAULTY), "--up-to", "4")
    assert done.exit_code == 1
    assert done.stdout.startswith("refuted: powers at Gr(1,3): (1) * (1) -> (2), q^(0): rule 7, oracle 1 (minimal: all 8 smaller")
    record = json.loads((tmp_path / "records" / "powers.json").read_text())
    assert (record["status"], len(record["counterexamples"])) == ("refuted", 1)


def test_keep_going(tmp_path):
    """With --keep-going all failures are counted, space by space."""
    done = run(write(tmp_path, FAULTY), "--up-to", "4", "--keep-going", "--no-record", "--no-ledger")
    assert done.exit_code == 1
    assert "all failures: Gr(1,3): 2 cases in 2 rows; Gr(1,4): 1 case in 1 row" in " ".join(done.stdout.split())
    assert sorted(path.name for path in tmp_path.iterdir()) == ["rule.py"]


def test_json(tmp_path):
    """With --json one document: the outcome, the hash of the rule, the spaces with all failures, and where it is recorded."""
    done = run(write(tmp_path, FAULTY), "--up-to", "4", "--keep-going", "--json")
    assert (done.exit_code, done.stderr) == (1, "")
    document = json.loads(done.stdout)
    assert (document["status"], document["where"], document["minimal"]) == ("refuted", "Gr(1,3): (1) * (1) -> (2), q^(0)", True)
    assert re.fullmatch("sha256:[0-9a-f]{64}", document["rule_hash"])
    assert [(s["space"], s["of"], s["seen"], s["failing"]) for s in document["surveyed"]] == [
        ("Gr(1,2)", 4, 4, 0),
        ("Gr(1,3)", 9, 9, 2),
        ("Gr(1,4)", 16, 16, 1),
    ]
    assert document["record"] == str(tmp_path / "records" / "powers.json")
    assert (document["resumed"], document["stale"]) == (0, [])


def test_json_of_a_rule_that_prints(tmp_path):
    """What a rule prints, wherever it is called, does not get into the document."""
    path = write(tmp_path, FAULTY.replace("    if", "    print('lantern', flush=True)\n    if", 1))
    done = subprocess.run(command(path, "--up-to", "4", "--json", "--jobs", "1"), capture_output=True, text=True, check=False)
    assert (done.returncode, done.stderr) == (1, "")
    assert json.loads(done.stdout)["status"] == "refuted"


def test_sample(tmp_path):
    """With --sample rows are drawn, by a seed; the bound is stated and recorded."""
    path = write(tmp_path, POWERS)
    done = run(path, "Gr(1,9)", "--sample", "50", "--seed", "3")
    assert done.exit_code == 0
    assert "seed 3: 50 on Gr(1,9) (at 95 % the share of failing rows" in " ".join(done.stdout.split())
    record = json.loads((tmp_path / "records" / "powers.json").read_text())
    assert [(s["rows"], s["seed"]) for s in record["samples"]] == [(50, 3)]
    assert record["coverage"] == []


def test_up_to(tmp_path):
    """--up-to N takes the spaces of the family with n up to N, --most-classes only the small ones of them."""
    path = write(tmp_path, POWERS)
    found = json.loads(run(path, "--up-to", "5", "--json", "--no-record").stdout)
    assert [s["space"] for s in found["surveyed"]] == ["Gr(1,2)", "Gr(1,3)", "Gr(1,4)", "Gr(1,5)"]
    found = json.loads(run(path, "--up-to", "5", "--most-classes", "3", "--json", "--no-record", "Gr(1,8)").stdout)
    assert [s["space"] for s in found["surveyed"]] == ["Gr(1,2)", "Gr(1,3)", "Gr(1,8)"]


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ([], "expected spaces such as 'Gr(2,5)', or --up-to N, got neither"),
        (["--most-classes", "7", "Gr(1,2)"], "expected --up-to N together with --most-classes"),
        (["lantern"], "lantern"),
        (["Gr(2,4)"], "expected flag varieties of the family of powers"),
        (["Gr(1,2)", "--sample", "0"], "--sample"),
        (["Gr(1,2)", "--jobs", "0"], "--jobs"),
        (["Gr(1,2)", "--call-limit", "0"], "--call-limit"),
        pytest.param(
            ["Gr(1,2)", "--cluster", "tcp://127.0.0.1:1"],
            "expected a scheduler at tcp://127.0.0.1:1, got",
            marks=pytest.mark.slow,
        ),
    ],
)
def test_wrong_usage(tmp_path, words, message):
    """Status 2, a message that says what was expected, and nothing is written."""
    if "--cluster" in words:
        pytest.importorskip("distributed")
    done = run(write(tmp_path, POWERS), *words)
    assert done.exit_code == 2
    assert message in done.stderr
    assert done.stdout == ""
    assert sorted(path.name for path in tmp_path.iterdir()) == ["rule.py"]


def test_plug_ins_that_cannot_be_used(tmp_path):
    """Status 2 for a missing file, one that is broken, one without that name, several conjectures, a space out of reach."""
    broken = write(tmp_path, "raise ValueError('lantern')", "broken.py")
    two = write(tmp_path, POWERS + POWERS.replace("powers", "again"), "two.py")
    far = write(tmp_path, "@candidate(on=Varieties('E8/B'))\ndef far(X, u, v, w, d):\n    return 0\n", "far.py")
    for words, message in (
        ([tmp_path / "none.py", "Gr(1,2)"], "expected a plug-in file"),
        ([broken, "Gr(1,2)"], "cannot be imported: ValueError: lantern"),
        ([two, "Gr(1,2)"], "expected one conjecture in"),
        ([f"{two}::lantern", "Gr(1,2)"], "expected one of powers, again"),
        ([far, "E8/B"], "E8/B"),
    ):
        done = run(*words)
        assert (done.exit_code, done.stdout) == (2, "")
        assert message in done.stderr
    assert run(f"{two}::again", "Gr(1,2)").exit_code == 0


def test_a_foreign_ledger(tmp_path):
    """Status 2, and the file is left alone."""
    other = tmp_path / "birds.txt"
    other.write_text("heron\n" * 100)
    done = run(write(tmp_path, POWERS), "Gr(1,2)", "--ledger", other)
    assert (done.exit_code, done.stdout) == (2, "")
    assert "birds.txt: expected a ledger of conjcheck, got another file; nothing was changed" in done.stderr
    assert other.read_text() == "heron\n" * 100


def test_not_finished(tmp_path):
    """Status 2, not 0 and not 1, if something that the rule did not do ended it."""
    source = "import os\nif 'worker' in ' '.join(__import__('sys').orig_argv):\n    raise ValueError('only here')\n" + POWERS
    done = run(write(tmp_path, source), "Gr(1,2)")
    assert done.exit_code == 2
    assert done.stdout.startswith("undefined: powers: not finished: ")
    assert "only here" in " ".join(done.stdout.split())


def test_a_rule_that_ends_its_process(tmp_path):
    """Status 1, whatever status the rule ends its process with, also where the failure is worked out."""
    deadly = POWERS.replace("    power =", "    if (X.n, u.length) == (3, 1):\n        os._exit(0)\n    power =")
    done = run(write(tmp_path, "import os\n" + deadly), "--up-to", "3")
    assert done.exit_code == 1
    assert done.stdout.startswith(
        "crashed: powers at Gr(1,3): (1) * () -> (1), q^(0): the process of the rule ended itself, with status 0"
    )
    both = FAULTY.replace("    power =", "    if (X.n, u.length, v.length) == (3, 2, 2):\n        os._exit(0)\n    power =")
    path = write(tmp_path, "import os\n" + both, "both.py")
    done = subprocess.run(command(path, "--up-to", "3", "--jobs", "1"), capture_output=True, text=True, check=False)
    assert done.returncode == 1
    assert done.stdout.startswith("refuted: powers at Gr(1,3): (1) * (1) -> (2), q^(0): rule 7, oracle 1")


def ledger_rows(path):
    """How many chunks a ledger holds."""
    import sqlite3

    try:
        base = sqlite3.connect(f"file:{path}?mode=ro", uri=True)
        found = base.execute("SELECT COUNT(*) FROM chunks").fetchone()[0]
        base.close()
    except sqlite3.Error:
        return 0
    return found


def test_interrupted(tmp_path):
    """After Ctrl-C: status 130 and one line; no process is left; and the same command goes on where it was."""
    waiting = "    while X.n == 8 and not Path(__file__).with_suffix('.on').exists():\n        time.sleep(0.02)\n    power ="
    path = write(tmp_path, "import time\nfrom pathlib import Path\n" + POWERS.replace("    power =", waiting))
    kept, words = tmp_path / ".ledger.sqlite", [path, *(f"Gr(1,{n})" for n in range(2, 9)), "--call-limit", "100", "--jobs", "2"]
    process = subprocess.Popen(command(*words), stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True)
    until = time.monotonic() + 60
    while ledger_rows(kept) < 3 and time.monotonic() < until:
        time.sleep(0.02)
    os.killpg(process.pid, signal.SIGINT)
    out, err = process.communicate(timeout=60)
    assert (process.returncode, out) == (130, "")
    assert err == f"interrupted; finished chunks are in {kept}, the same command goes on\n"
    assert none_left(tmp_path.name)
    path.with_suffix(".on").touch()
    done = run(*words)
    assert done.exit_code == 0
    assert int(re.search(r"(\d+) of the rows were taken from the ledger", done.stdout)[1]) >= 29


def test_the_bar(tmp_path):
    """On a terminal a bar on standard error shows the space, the rate and the time left."""
    path = write(tmp_path, SLOW)
    here, there = pty.openpty()
    process = subprocess.Popen(
        command(path, "--up-to", "7", "--jobs", "1"),
        stdout=subprocess.PIPE,
        stderr=there,
        text=True,
        env={**os.environ, "COLUMNS": "120", "TERM": "xterm"},
    )
    os.close(there)
    shown = b""
    while True:
        try:
            part = os.read(here, 4096)
        except OSError:
            break
        if not part:
            break
        shown += part
    os.close(here)
    out, _ = process.communicate(timeout=20)
    assert process.returncode == 0
    assert "\x1b" not in out
    text = shown.decode()
    assert re.search(r"survey +\[[#-]+\] +\d+%", text)
    assert re.search(r"Gr\(1,\d\), \d+ rows/s", text)
    assert re.search(r"\d\d:\d\d:\d\d", text)


def test_help():
    """The help names every option and the exit statuses."""
    text = CliRunner().invoke(main, ["survey", "--help"]).stdout
    for name in (
        "--up-to",
        "--jobs",
        "--cluster",
        "--keep-going",
        "--sample",
        "--ledger",
        "--memory",
        "Exit status: 0 agrees",
        "130 interrupted",
    ):
        assert name in text
    assert marked("nobody") == []


def test_what_cannot_be_recorded(tmp_path):
    """The verdict is printed all the same; one line on standard error says why; agreement that is not recorded has status 2."""
    (tmp_path / "records").write_text("a file where a folder should be")
    for source, status, word in ((POWERS, 2, "agrees: powers"), (FAULTY, 1, "refuted: powers")):
        done = run(write(tmp_path, source), "Gr(1,2)", "Gr(1,3)", "--no-ledger")
        assert done.exit_code == status
        assert done.stdout.startswith(word)
        assert "recorded in" not in done.stdout
        (line,) = done.stderr.splitlines()
        assert line.startswith("Error: ")
        assert "expected a file that can be written" in line
    assert run(tmp_path / "rule.py", "Gr(1,2)", "--no-ledger", "--no-record").exit_code == 0


def test_a_repaired_rule(tmp_path):
    """After a repair the survey says which counterexample refutes no more, and citing the record calls nothing false."""
    path = write(tmp_path, FAULTY)
    assert run(path, "Gr(1,3)").exit_code == 1
    write(tmp_path, POWERS)
    os.utime(path, (1e9, 1e9))
    done = run(path, "Gr(1,3)")
    assert done.exit_code == 0
    assert "1 counterexample on record refutes no more and was retired: Gr(1,3): (1) * (1) -> (2), q^(0)" in " ".join(
        done.stdout.split()
    )
    cited = CliRunner().invoke(main, ["cite", str(tmp_path / "records" / "powers.json")]).stdout
    assert "They agree there" in cited
    assert "false" not in cited


def test_a_sample_without_rows(tmp_path):
    """A sample that meets no row of the premise says to raise --sample; one of few rows states no bound."""
    source = POWERS.replace("on=ProjectiveSpaces()", "on=ProjectiveSpaces(), premise=lambda X, u, v: u.length + v.length == 0")
    done = run(write(tmp_path, source), "Gr(1,9)", "--sample", "1", "--no-record", "--no-ledger")
    assert done.exit_code == 2
    assert "raise --sample" in " ".join(done.stdout.split())
    done = run(write(tmp_path, POWERS), "Gr(1,9)", "--sample", "5", "--no-ledger")
    assert "5 on Gr(1,9) (too few rows for a bound on the failures)" in " ".join(done.stdout.split())
    cited = CliRunner().invoke(main, ["cite", str(tmp_path / "records" / "powers.json")]).stdout
    assert "too few for a bound on the failures" in cited
