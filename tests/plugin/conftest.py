"""Projects of plug-ins to run pytest on, in a process of their own."""

import json
import re
import sys
from pathlib import Path
from textwrap import dedent
from xml.etree import ElementTree as ET

import pytest

sys.path.insert(0, str(Path(__file__).parent))


PROFILE = """
from hypothesis import settings

settings.register_profile("short", max_examples=12)
settings.load_profile("short")
"""


class Project:
    """A folder with plug-ins, and runs of pytest on it."""

    def __init__(self, pytester):
        self.pytester, self.path = pytester, pytester.path
        self.ini()
        self.write("conftest.py", PROFILE)

    def ini(self, *lines):
        """The ini file: one second for a survey, and more lines."""
        text = "\n".join(["[pytest]", "conjcheck_budget = 1", *lines])
        (self.path / "pytest.ini").write_text(text + "\n")

    def write(self, name, source):
        """A file, its source indented as is convenient."""
        path = self.path / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(dedent(source))
        return path

    def run(self, *args):
        """A run of pytest."""
        result = self.pytester.runpytest_subprocess(*args, timeout=120)
        result.text = result.stdout.str()
        return result

    def items(self, *args):
        """The node ids that pytest would run."""
        text = self.run("--collect-only", "-q", *args).text
        return [line for line in text.splitlines() if "::" in line and " " not in line.replace("probe[n", "")]

    def summary(self, result):
        """The lines of the short summary of failures."""
        return [line for line in result.outlines if line.startswith(("FAILED ", "ERROR "))]

    def table(self, result):
        """The final table: the name of each conjecture with its status."""
        lines = result.outlines
        start = next((k for k, line in enumerate(lines) if re.fullmatch(r"=+ conjectures =+", line)), None)
        if start is None:
            return None
        below = [line for line in lines[start + 1 :] if line]
        assert below[0].startswith("conjecture ")
        found = {}
        for line in below[1:]:
            cells = re.split(r"\s{2,}", line.strip())
            if len(cells) < 7:
                break
            found[cells[0]] = cells[1]
        return found

    def properties(self, file="out.xml"):
        """What junit holds about each item: ``{item: [JSON of the property conjcheck]}``."""
        found = {}
        for case in ET.parse(self.path / file).iter("testcase"):
            values = [json.loads(p.get("value")) for p in case.iter("property") if p.get("name") == "conjcheck"]
            found[f"{case.get('classname')}.{case.get('name')}"] = values
        return found


@pytest.fixture(scope="session")
def bytecode(tmp_path_factory):
    """Where the runs share their bytecode: compiling everything anew takes longer than most of them."""
    return tmp_path_factory.mktemp("bytecode")


@pytest.fixture
def project(pytester, monkeypatch, bytecode):
    """An empty project."""
    monkeypatch.setenv("COLUMNS", "240")
    monkeypatch.setenv("PYTHONPYCACHEPREFIX", str(bytecode))
    for name in ("PYTHONDONTWRITEBYTECODE", "PYTEST_ADDOPTS", "CI"):
        monkeypatch.delenv(name, raising=False)
    return Project(pytester)
