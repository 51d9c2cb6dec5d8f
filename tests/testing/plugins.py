"""Plug-in files for the tests of surveys: right rules from tables of another program, and what is left behind by processes."""

import json
import os
import sys
import time
from pathlib import Path
from textwrap import dedent

from planted import plain_rows, truth

HEAD = "from conjcheck import CompleteFlags, PartialFlags, ProjectiveSpaces, Varieties, candidate, claim\n"

POWERS = '''
@candidate(on=ProjectiveSpaces())
def powers(X, u, v, w, d):
    """Two powers of the hyperplane class."""
    power = u.length + v.length
    if power < X.n:
        return int(w.length == power and d == (0,))
    return int(w.length == power - X.n and d == (1,))
'''
"""A rule that is right, on all projective spaces, asked case by case."""

TABLE = """
import json
from pathlib import Path

ROWS = {key: value for key, value in json.loads(Path(__file__).with_name("table.json").read_text()).items()}


def known(X, u, v):
    words = [".".join(map(str, x.permutation)) for x in (u, v)]
    return {(X.schubert(permutation=w), tuple(d)): n for w, d, n in ROWS[f"{X} {words[0]} {words[1]}"]}
"""
"""What a rule needs to read its values from the file ``table.json`` beside it."""


def write(folder, source, name="rule.py", *, head=HEAD):
    """A plug-in file, its source indented as is convenient."""
    path = Path(folder) / name
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(head + dedent(source))
    return path


def table_of_flags(folder, n):
    """Beside a plug-in: the file with all constants of ``Fl(n)`` by the plain script, which owes nothing to the library."""
    rows = {}
    for (u, v), terms in plain_rows(n).items():
        words = [".".join(map(str, x)) for x in (u, v)]
        rows[f"Fl({n}) {words[0]} {words[1]}"] = [[w, d, count] for (w, d), count in terms.items()]
    (Path(folder) / "table.json").write_text(json.dumps(rows))


def table_of(folder, spaces):
    """Beside a plug-in: the file with all constants of some spaces of type A."""
    rows = {}
    for X in spaces:
        for (u, v), terms in truth(X).items():
            words = [".".join(map(str, x.permutation)) for x in (u, v)]
            rows[f"{X} {words[0]} {words[1]}"] = [[list(w.permutation), list(d), n] for (w, d), n in terms.items()]
    (Path(folder) / "table.json").write_text(json.dumps(rows))


def load(path, name=None):
    """The conjecture of that name in a file, or the only one."""
    from conjcheck.conjecture.discover import conjectures_in_file

    before = list(sys.path)
    try:
        found = conjectures_in_file(Path(path))
    finally:
        sys.path[:] = before
    return next(c for c in found if name in (None, c.name))


def marked(mark):
    """The ids of all processes with ``CONJCHECK_TEST_MARK=mark`` in the environment they were started with."""
    found = []
    for folder in Path("/proc").iterdir():
        if folder.name.isdigit() and int(folder.name) != os.getpid():
            try:
                tracker = b"resource_tracker" in (folder / "cmdline").read_bytes()  # of multiprocessing: it ends with this process
                ours = f"CONJCHECK_TEST_MARK={mark}\0".encode() in (folder / "environ").read_bytes() + b"\0"
                if ours and not tracker and (folder / "stat").read_text().rsplit(")", 1)[1].split()[0] != "Z":
                    found.append(int(folder.name))
            except OSError:
                continue
    return found


def none_left(mark, seconds=10.0):
    """Whether all processes with this mark end within some seconds."""
    until = time.monotonic() + seconds
    while marked(mark):
        if time.monotonic() > until:
            return False
        time.sleep(0.05)
    return True
