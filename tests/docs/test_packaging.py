"""What the project says about itself is the same everywhere."""

import re
import subprocess
import sys
import tomllib
from importlib.metadata import entry_points, version
from pathlib import Path

import conjcheck

ROOT = Path(__file__).parents[2]
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))


def test_one_version():
    """The version is the same in the project file, the package, the citation file and the installed metadata."""
    stated = PROJECT["project"]["version"]
    cited = re.search(r"^version: (.+)$", (ROOT / "CITATION.cff").read_text(encoding="utf-8"), re.MULTILINE)[1]
    assert stated == conjcheck.__version__ == cited == version("conjcheck")


def test_every_package_is_listed():
    """The project file lists every package folder, so that the wheel holds them all."""
    folders = {"conjcheck"} | {f"conjcheck.{path.parent.name}" for path in (ROOT / "conjcheck").glob("*/__init__.py")}
    assert set(PROJECT["tool"]["setuptools"]["packages"]) == folders


def test_public_names_exist_and_are_typed():
    """Every public name can be imported, and type checkers see the same names."""
    text = (ROOT / "conjcheck" / "__init__.py").read_text(encoding="utf-8")
    seen = re.findall(r"import (\w+) as \1", text)
    assert sorted(seen) == conjcheck.__all__
    for name in conjcheck.__all__:
        assert getattr(conjcheck, name) is not None
    assert (ROOT / "conjcheck" / "py.typed").is_file()


def test_import_is_cheap():
    """``import conjcheck`` and its pytest plug-in load neither numpy nor hypothesis nor sympy."""
    code = (
        "import sys, conjcheck, conjcheck.pytest_plugin; print([m for m in ('numpy', 'hypothesis', 'sympy') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_the_plugin_is_an_entry_point():
    """pytest finds the plug-in."""
    assert "conjcheck.pytest_plugin" in {point.value for point in entry_points(group="pytest11")}


def test_top_level_holds_what_it_should():
    """Nothing but the agreed files and folders stands at the top level of the repository."""
    listed = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=False).stdout.split("\n")
    top = {line.split("/")[0] for line in listed if line and not line.startswith(".")}
    files = {"README.md", "DEVELOPERS.md", "LICENSE", "CITATION.cff", "pyproject.toml"}
    expected = files | {"conjcheck", "strategies", "tests", "conjectures"}
    assert not top or top == expected
