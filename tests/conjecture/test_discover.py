"""Where conjectures are found."""

import sys
import types

import pytest

from conjcheck.conjecture.discover import GROUP, conjectures_in, installed_files
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
