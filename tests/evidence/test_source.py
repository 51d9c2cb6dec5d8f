"""What a rule is: the hash of its file and of all that it imports from its repository."""

import re
import shutil

import pytest

from conjcheck.errors import RecordError
from conjcheck.evidence.source import keep_version, kept_version, rule_hash, source_files, version_of

FILES = {
    "pyproject.toml": "",
    "conjectures/rule.py": (
        "import math\nfrom _direct import f\nimport pack.inner\nfrom shared import tools\n\n\ndef rule(X, u, v):\n    from _late import g\n"
        "    return f(g(u))\n"
    ),
    "conjectures/_direct.py": "from _second import h\n\n\ndef f(x):\n    return h(x)\n",
    "conjectures/_second.py": "def h(x):\n    return 1\n",
    "conjectures/_late.py": "def g(x):\n    return 2\n",
    "conjectures/pack/__init__.py": "ONE = 1\n",
    "conjectures/pack/inner.py": "from . import TWO\nfrom .near import THREE\nfrom ..aside import FOUR\n",
    "conjectures/pack/near.py": "THREE = 3\n",
    "conjectures/aside.py": "FOUR = 4\n",
    "shared/__init__.py": "from .starred import *\n",
    "shared/tools.py": "import importlib\n\nFIVE = importlib.import_module('by_name')\nSIX = __import__('built_in')\n",
    "shared/starred/__init__.py": "from .part import *\n",
    "shared/starred/part.py": "SEVEN = 7\n",
    "by_name.py": "FIVE = 5\n",
    "built_in.py": "SIX = 6\n",
}
UNRELATED = {
    "conjectures/_other.py": "x = 1\n",
    "conjectures/other.py": "from rule import rule\n",
    "conjectures/records/rule.json": "{}",
    "README.md": "hello\n",
    "shared/unused.py": "y = 1\n",
    "by_names.py": "z = 1\n",
}


@pytest.fixture
def repository(tmp_path):
    """A repository with a rule and its helpers; its rule file."""
    for name, text in FILES.items():
        path = tmp_path / "here" / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text)
    return tmp_path / "here"


def test_its_shape(repository):
    """It is ``sha256:`` and 64 hexadecimal digits, and the same every time."""
    found = rule_hash(repository / "conjectures/rule.py")
    assert re.fullmatch("sha256:[0-9a-f]{64}", found)
    assert rule_hash(str(repository / "conjectures/../conjectures/rule.py")) == found


@pytest.mark.parametrize("name", [name for name in FILES if name.endswith(".py")])
def test_one_character(repository, name):
    """One character more in the rule, a helper, its helper, a package, its ``__init__``, or what is imported late changes it."""
    before = rule_hash(repository / "conjectures/rule.py")
    (repository / name).write_text(FILES[name] + "#")
    assert rule_hash(repository / "conjectures/rule.py") != before
    (repository / name).write_text(FILES[name])
    assert rule_hash(repository / "conjectures/rule.py") == before


@pytest.mark.parametrize("name", UNRELATED)
def test_unrelated_files(repository, name):
    """Files that the rule does not import play no part."""
    before = rule_hash(repository / "conjectures/rule.py")
    (repository / name).parent.mkdir(exist_ok=True)
    (repository / name).write_text(UNRELATED[name])
    assert rule_hash(repository / "conjectures/rule.py") == before


def test_the_place_of_the_repository(repository, tmp_path):
    """A copy elsewhere has the same hash."""
    shutil.copytree(repository, tmp_path / "very" / "far" / "away")
    assert rule_hash(tmp_path / "very/far/away/conjectures/rule.py") == rule_hash(repository / "conjectures/rule.py")


def test_the_name_of_a_file(repository):
    """A file under another name is another rule: its name can be asked by the program."""
    before = rule_hash(repository / "conjectures/rule.py")
    (repository / "conjectures/rule.py").rename(repository / "conjectures/rules.py")
    assert rule_hash(repository / "conjectures/rules.py") != before


@pytest.mark.parametrize("end", [b"\r\n", b"\r"])
def test_line_ends(repository, end):
    """Line ends of other systems play no part."""
    before = rule_hash(repository / "conjectures/rule.py")
    for name, text in FILES.items():
        (repository / name).write_bytes(text.encode().replace(b"\n", end))
    assert rule_hash(repository / "conjectures/rule.py") == before


@pytest.mark.parametrize("odd", ["\x0b", "\x0c", "\x1c", "\x85", "\u2028"])
def test_only_line_ends_are_made_equal(repository, odd):
    """What some programs take for a line end, and Python does not, counts as it stands."""
    path = repository / "conjectures/rule.py"
    path.write_text('TEXT = """a\nb"""\n')
    before = rule_hash(path)
    path.write_text(f'TEXT = """a{odd}b"""\n', encoding="utf-8")
    assert rule_hash(path) != before


def test_a_byte_order_mark(repository):
    """Helpers are seen behind a byte order mark, too."""
    path = repository / "conjectures/rule.py"
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes())
    before = rule_hash(path)
    (repository / "conjectures/_second.py").write_text("def h(x):\n    return 3\n")
    assert rule_hash(path) != before


def test_a_folder_for_sources(repository):
    """A package in the folder ``src`` of the repository is found."""
    (repository / "src/far").mkdir(parents=True)
    (repository / "src/far/__init__.py").write_text("A = 1\n")
    path = repository / "conjectures/rule.py"
    path.write_text("from far import A\n")
    before = rule_hash(path)
    (repository / "src/far/__init__.py").write_text("A = 2\n")
    assert rule_hash(path) != before


def test_files_that_are_named(tmp_path):
    """A file that a rule or its helper names in a string is part of it, byte by byte; other files beside it are not."""
    (tmp_path / "data").mkdir()
    (tmp_path / "rule.py").write_text(
        "import pathlib\nimport helper\nT = pathlib.Path(__file__).with_name('table.json').read_text()\n"
    )
    (tmp_path / "helper.py").write_text("open('data/more.bin')\nX = ('', '.', 'none.txt', 'a\\0b', '/etc/hostname', 'x' * 9999)\n")
    hashes = [rule_hash(tmp_path / "rule.py")]
    for name, data in (("table.json", b"[1]"), ("table.json", b"[2]"), ("data/more.bin", b"\xff"), ("data/more.bin", b"\xfe")):
        (tmp_path / name).write_bytes(data)
        hashes.append(rule_hash(tmp_path / "rule.py"))
    assert len(set(hashes)) == 5
    (tmp_path / "data" / "other.bin").write_bytes(b"1")
    assert rule_hash(tmp_path / "rule.py") == hashes[-1]
    shutil.copytree(tmp_path, tmp_path / "elsewhere")
    assert rule_hash(tmp_path / "elsewhere" / "rule.py") == hashes[-1]


@pytest.mark.parametrize(
    ("source", "name"),
    [
        ("import sys\nsys.path.insert(0, 'lib')\nimport far\n", "lib/far.py"),
        ("import far\n", "more/lib/far/__init__.py"),
        ("from far.near import x\n", "lib/far/near.py"),
        ("import importlib\nimportlib.import_module(name='far')\n", "far.py"),
        ("from pathlib import Path\nT = Path(__file__).parent / 'data' / 'table.json'\n", "conjectures/data/table.json"),
        ("from pathlib import Path\nT = Path(__file__).parents[1] / 'data' / 'table.json'\n", "data/table.json"),
        ("T = '../data/table.json'\n", "data/table.json"),
    ],
)
@pytest.mark.parametrize("mark", [".git", "conftest.py"])
def test_what_lies_elsewhere_in_the_repository(tmp_path, source, name, mark):
    """What Python would not find beside the rule, or above it, is looked for in the whole repository, modules and data alike."""
    (tmp_path / mark).touch()
    for file, text in (("conjectures/rule.py", source), (name, "x = 1\n"), ("lib/other.py", "y = 1\n"), (".hidden/far.py", "")):
        (tmp_path / file).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / file).write_text(text)
    hashes = [rule_hash(tmp_path / "conjectures" / "rule.py")]
    for file, text in ((name, "x = 2\n"), ("lib/other.py", "y = 2\n"), (".hidden/far.py", "z = 1\n")):
        (tmp_path / file).write_text(text)
        hashes.append(rule_hash(tmp_path / "conjectures" / "rule.py"))
    assert hashes[0] != hashes[1] == hashes[2] == hashes[3]


def test_a_version_knows_what_has_changed(tmp_path):
    """A version knows the first of its files that says something else than it did; touching one is no change."""
    path, data = tmp_path / "rule.py", tmp_path / "table.json"
    path.write_text("T = 'table.json'\n")
    data.write_text("[1]")
    version = version_of(path)
    assert version.changed is None
    data.write_text("[2]")
    assert version.changed == data
    data.write_text("[1]")
    path.touch()
    assert version.changed is None
    assert kept_version(path).rule == version_of(path).rule == version.rule
    path.write_text("T = 'table.json'  # more\n")
    assert version.changed == path
    assert kept_version(path).rule != version.rule
    keep_version(path, version)
    assert kept_version(path) is version
    path.write_text("T = 'table.json'\n")
    data.unlink()
    assert version.changed == data


@pytest.mark.parametrize("folder", ["build/lib", "env/lib", ".venv/lib", "odd/site-packages", "conda/lib", "own/lib"])
def test_what_nobody_writes(tmp_path, folder):
    """Builds and environments in the repository play no part, so that the hash is the same before and after them."""
    (tmp_path / "pyproject.toml").touch()
    (tmp_path / "rule.py").write_text("import far\n")
    (tmp_path / "real").mkdir()
    (tmp_path / "real" / "far.py").write_text("x = 1\n")
    before = rule_hash(tmp_path / "rule.py")
    (tmp_path / folder).mkdir(parents=True)
    (tmp_path / folder / "far.py").write_text("x = 1\n")
    if folder.startswith("own"):
        (tmp_path / "own" / "pyvenv.cfg").touch()
    if folder.startswith("conda"):
        (tmp_path / "conda" / "conda-meta").mkdir()
    assert rule_hash(tmp_path / "rule.py") == before


def test_an_installed_plug_in(tmp_path):
    """A plug-in in an installed package is judged with its package, not with all that is installed beside it."""
    (tmp_path / "pyproject.toml").touch()
    for name, text in (
        ("pkg/rule.py", "import other\nfrom pkg import near\n"),
        ("pkg/__init__.py", ""),
        ("pkg/near.py", ""),
        ("other.py", ""),
    ):
        path = tmp_path / "lib" / "site-packages" / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text)
    found = source_files(tmp_path / "lib" / "site-packages" / "pkg" / "rule.py")
    assert {path.name for path in found} <= {"rule.py", "near.py", "__init__.py"}


def test_a_circle(tmp_path):
    """Files that import each other come once each, the plug-in first."""
    (tmp_path / "a.py").write_text("import b\n")
    (tmp_path / "b.py").write_text("import a\n")
    assert source_files(tmp_path / "a.py") == [(tmp_path / "a.py").resolve(), (tmp_path / "b.py").resolve()]
    assert rule_hash(tmp_path / "a.py") != rule_hash(tmp_path / "b.py")


def test_texts_cannot_flow_into_each_other(tmp_path):
    """Moving text from one file to the next changes it."""
    (tmp_path / "a.py").write_text("import b\nx = 1\n")
    (tmp_path / "b.py").write_text("y = 1\n")
    before = rule_hash(tmp_path / "a.py")
    (tmp_path / "a.py").write_text("import b\n")
    (tmp_path / "b.py").write_text("x = 1\ny = 1\n")
    assert rule_hash(tmp_path / "a.py") != before


@pytest.mark.parametrize("content", [b"def broken(:\n", b"x = 1\x00\n"])
def test_what_does_not_parse(tmp_path, content):
    """A file that is no Python is hashed as text."""
    (tmp_path / "a.py").write_bytes(content)
    before = rule_hash(tmp_path / "a.py")
    (tmp_path / "a.py").write_bytes(content + b"#")
    assert rule_hash(tmp_path / "a.py") != before


@pytest.mark.parametrize("name", ["a.py", "b.py"])
def test_not_utf_8(tmp_path, name):
    """A file that is not UTF-8, the rule or a helper, is refused by name."""
    (tmp_path / "a.py").write_text("import b\n")
    (tmp_path / "b.py").write_text("")
    (tmp_path / name).write_bytes(b"# -*- coding: latin-1 -*-\n# \xe9\n")
    with pytest.raises(RecordError, match=rf"{name}: expected a readable Python file in UTF-8, got"):
        rule_hash(tmp_path / "a.py")


def test_no_file(tmp_path):
    """A missing file, or a folder, is refused by name."""
    for path in (tmp_path / "none.py", tmp_path):
        with pytest.raises(RecordError, match=f"{path.name}: expected a readable Python file in UTF-8, got"):
            rule_hash(path)
