"""Where conjectures are found."""

import importlib
import os
import sys
import types

import pytest

from conjcheck import Fl, examine, product
from conjcheck.conjecture.discover import (
    GROUP,
    asked_while_imported,
    conjectures_in,
    conjectures_in_file,
    installed_files,
    prefer_helpers_of,
)
from conjcheck.errors import DeclarationError


def module_of(source, name="made_up"):
    """A module with some source."""
    module = types.ModuleType(name)
    exec(compile(source, f"{name}.py", "exec"), vars(module))
    return module


HEADER = "from conjcheck import Grassmannians, candidate, claim\n"
RULE = "@candidate(on=Grassmannians())\ndef {}(X, u, v):\n    return {{}}\n"


def test_in_the_order_of_the_file():
    """The conjectures of a module come in the order of its lines, whatever their names or bindings."""
    source = HEADER + RULE.format("zebra") + RULE.format("ant") + "another = zebra\n"
    assert [c.name for c in conjectures_in(module_of(source))] == ["zebra", "ant"]


def test_imported_ones_are_not_its_own():
    """A conjecture imported from another module belongs to that one."""
    first = module_of(HEADER + RULE.format("mine"), "first_module")
    second = module_of(HEADER + RULE.format("other"), "second_module")
    second.mine = first.mine
    assert [c.name for c in conjectures_in(second)] == ["other"]
    assert [c.name for c in conjectures_in(first)] == ["mine"]


def test_nothing_else():
    """Functions, decorators and families of a module are no conjectures."""
    assert conjectures_in(module_of(HEADER + "def plain(X, u, v):\n    return {}\n")) == []


def test_roles():
    """Candidates and claims are found alike."""
    source = HEADER + "@claim(on=Grassmannians())\ndef true(X, u, v, N):\n    return True\n" + RULE.format("rule")
    assert [c.role for c in conjectures_in(module_of(source))] == ["claim", "candidate"]


def offered(tmp_path, monkeypatch, *lines):
    """Install a made-up distribution that offers some entry points, and a package beside it."""
    info = tmp_path / "made_up-1.0.dist-info"
    info.mkdir()
    (info / "METADATA").write_text("Metadata-Version: 2.1\nName: made-up\nVersion: 1.0\n")
    (info / "entry_points.txt").write_text(f"[{GROUP}]\n" + "".join(f"{line}\n" for line in lines))
    package = tmp_path / "made_up_rules"
    package.mkdir()
    (package / "__init__.py").write_text("")
    (package / "first.py").write_text("raise RuntimeError('imported')\n")
    monkeypatch.syspath_prepend(tmp_path)


def test_installed_files(tmp_path, monkeypatch):
    """Installed packages offer files of conjectures by entry points; the files are named without being imported."""
    offered(tmp_path, monkeypatch, "one = made_up_rules.first", "two = made_up_rules")
    found = installed_files()
    assert tmp_path / "made_up_rules" / "first.py" in found
    assert tmp_path / "made_up_rules" / "__init__.py" in found
    assert "made_up_rules.first" not in sys.modules


@pytest.mark.parametrize("value", ["no_such_package", "no_such_package.module", "made_up_rules.absent", "sys", "itertools"])
def test_entry_points_without_a_file(tmp_path, monkeypatch, value):
    """An entry point without a source file is refused by name."""
    offered(tmp_path, monkeypatch, f"broken = {value}")
    with pytest.raises(DeclarationError, match=f"the entry point 'broken' of conjcheck.conjectures, got '{value}'"):
        installed_files()


@pytest.mark.parametrize("name", ["rule.py", "helper.py", "pack/__init__.py", "pack/part.py"])
def test_what_the_file_says_now(tmp_path, monkeypatch, name):
    """A file, its helpers and packages are compiled anew, though cached bytecode bears the same second and length."""
    monkeypatch.setattr(sys, "path", [*sys.path])
    monkeypatch.setattr(sys, "dont_write_bytecode", False)
    texts = {
        "rule.py": HEADER + "import helper\nfrom pack import P, part\n" + RULE.format("found") + "MARK = helper.H, P, part.Q, 1\n",
        "helper.py": "H = 1\n",
        "pack/__init__.py": "P = 1\n",
        "pack/part.py": "Q = 1\n",
    }
    (tmp_path / "pack").mkdir()
    seen = []
    for digit in "12":
        for other, text in texts.items():
            (tmp_path / other).write_text(text.replace("1\n", f"{digit}\n") if other == name else text)
            os.utime(tmp_path / other, (1e9, 1e9))
        for module in ("helper", "pack", "pack.part"):
            sys.modules.pop(module, None)
        (conjecture,) = conjectures_in_file(tmp_path / "rule.py")
        seen.append(vars(sys.modules[conjecture.rule.__module__])["MARK"])
    for module in ("helper", "pack", "pack.part"):
        del sys.modules[module]
    assert seen[0] == (1, 1, 1, 1)
    assert sorted(seen[1]) == [1, 1, 1, 2]


@pytest.mark.parametrize(
    ("source", "words"),
    [
        ("raise ValueError('lantern')", "cannot be imported: ValueError: lantern"),
        ("import sys\nsys.exit(0)", "cannot be imported: SystemExit: 0"),
        ("def broken(:", "cannot be imported: SyntaxError"),
        ("x = 1\n", "expected at least one @candidate or @claim, got none"),
        ("# \udce9", "expected a readable Python file in UTF-8"),
    ],
)
def test_files_that_cannot_be_used(tmp_path, monkeypatch, source, words):
    """A file that raises, ends, is no Python, or holds no conjecture is refused by name."""
    monkeypatch.setattr(sys, "path", [*sys.path])
    path = tmp_path / "rule.py"
    path.write_text(source, encoding="utf-8", errors="surrogateescape")
    with pytest.raises(DeclarationError, match=words) as caught:
        conjectures_in_file(path)
    assert "rule.py" in str(caught.value)


def test_no_such_file(tmp_path):
    """What is no Python file is refused."""
    (tmp_path / "rule.txt").touch()
    for path in (tmp_path / "rule.py", tmp_path / "rule.txt", tmp_path):
        with pytest.raises(DeclarationError, match="expected a plug-in file such as conjectures"):
            conjectures_in_file(path)


@pytest.fixture
def two(tmp_path, monkeypatch):
    """Two folders of plug-ins with helpers of the same names: a package, and a module that is imported when the rule runs."""
    monkeypatch.setattr(sys, "path", [*sys.path])
    for name, value in (("one", 1), ("two", 2)):
        package = tmp_path / name / "quiet_util"
        package.mkdir(parents=True)
        (package / "__init__.py").write_text("")
        (package / "core.py").write_text(f"VALUE = {value}\n")
        (tmp_path / name / "_quiet_late.py").write_text(f"VALUE = {value}\n")
        (tmp_path / name / f"rule_{name}.py").write_text(
            HEADER + "from quiet_util.core import VALUE\n@candidate(on=Grassmannians())\n"
            "def rule(X, u, v):\n    from _quiet_late import VALUE as late\n    return VALUE, late\n"
        )
    yield tmp_path
    for module in [name for name in sys.modules if name.startswith(("quiet_util", "_quiet_late"))]:
        del sys.modules[module]


def test_helpers_of_different_folders(two):
    """Each plug-in gets the package beside it, and the module that its rule imports late, whatever was imported before."""
    rules = {name: conjectures_in_file(two / name / f"rule_{name}.py")[0] for name in ("one", "two")}
    for name, value in (("one", 1), ("two", 2), ("one", 1)):
        prefer_helpers_of(two / name)
        assert rules[name].rule(None, None, None) == (value, value)


def test_changed_while_it_is_imported(tmp_path, monkeypatch):
    """A file that is written to while it is imported is refused: nobody knows which version was."""
    monkeypatch.setattr(sys, "path", [*sys.path])
    path = tmp_path / "rule.py"
    path.write_text(HEADER + RULE.format("found") + "with open(__file__, 'a') as file:\n    file.write('# more')\n")
    with pytest.raises(DeclarationError, match=r"to stay as it is while .*rule.py is imported, it was changed; start again"):
        conjectures_in_file(path)


def test_who_asked_the_oracle(tmp_path, monkeypatch):
    """A helper that tabulates the oracle when it is first imported makes every plug-in doubtful that imports it, and no other."""
    monkeypatch.setattr(sys, "path", [*sys.path])
    (tmp_path / "_quiet_table.py").write_text("from conjcheck import Fl, product\nTABLE = product(Fl(3).point, Fl(3).point)\n")
    found = []
    for name, line in (("first", "import _quiet_table\n"), ("second", "import _quiet_table\n"), ("third", "")):
        (tmp_path / f"{name}.py").write_text(HEADER + line + RULE.format(name))
        found += conjectures_in_file(tmp_path / f"{name}.py")
    del sys.modules["_quiet_table"]
    assert [asked_while_imported(conjecture) for conjecture in found] == [True, True, False]


def test_who_asked_before_anybody_watched(tmp_path, monkeypatch):
    """It does not matter who imports the helper first; and a script that examines its rule at its end does not ask by that."""
    monkeypatch.setattr(sys, "path", [str(tmp_path), *sys.path])
    (tmp_path / "_quiet_table.py").write_text("from conjcheck import Fl, product\nTABLE = product(Fl(3).point, Fl(3).point)\n")
    importlib.import_module("_quiet_table")
    (tmp_path / "late.py").write_text(HEADER + "import _quiet_table\n" + RULE.format("late"))
    (late,) = conjectures_in_file(tmp_path / "late.py")
    del sys.modules["_quiet_table"]
    assert asked_while_imported(late)
    path = tmp_path / "script.py"
    path.write_text(HEADER + RULE.format("right"))
    (right,) = conjectures_in_file(path)
    names = {"examine": examine, "right": right, "product": product, "Fl": Fl}
    exec(compile("examine(right, effort='quick', budget=0.1)", str(path), "exec"), names)
    assert not asked_while_imported(right)
    exec(compile("product(Fl(3).point, Fl(3).point)", str(path), "exec"), names)
    assert asked_while_imported(right)


def test_the_same_modules_come_back(two):
    """A folder gets back the very modules that its plug-ins imported, with what they remember."""
    for name in ("one", "two"):
        prefer_helpers_of(two / name)
        importlib.import_module("quiet_util.core").MARK = name
    for name in ("one", "two", "one"):
        prefer_helpers_of(two / name)
        assert name == importlib.import_module("quiet_util.core").MARK
