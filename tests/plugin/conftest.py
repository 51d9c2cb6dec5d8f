"""Projects of plug-ins to run pytest on, in a process of their own."""

import json
import re
import sys
from pathlib import Path
from textwrap import dedent
from xml.etree import ElementTree

import pytest

sys.path.insert(0, str(Path(__file__).parent))


class Project:
    """A folder with plug-ins, and runs of pytest on it."""

    def __init__(self, pytester, monkeypatch):
        self.pytester, self.path = pytester, pytester.path
        monkeypatch.setenv("COLUMNS", "240")
        monkeypatch.delenv("PYTEST_ADDOPTS", raising=False)
        monkeypatch.delenv("CI", raising=False)
        self.ini()

    def ini(self, *lines):
        """The ini file: quick, and more lines."""
        text = "\n".join(["[pytest]", "conjcheck_effort = quick", "conjcheck_budget = 1", *lines])
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
        assert lines[start + 1].startswith("conjecture ")
        found = {}
        for line in lines[start + 2 :]:
            cells = re.split(r"\s{2,}", line.strip())
            if len(cells) < 7:
                break
            found[cells[0]] = cells[1]
        return found

    def properties(self, file="out.xml"):
        """What junit holds about each item: ``{item: [JSON of the property conjcheck]}``."""
        found = {}
        for case in ElementTree.parse(self.path / file).iter("testcase"):
            values = [json.loads(p.get("value")) for p in case.iter("property") if p.get("name") == "conjcheck"]
            found[f"{case.get('classname')}.{case.get('name')}"] = values
        return found


@pytest.fixture
def project(pytester, monkeypatch):
    """An empty project."""
    return Project(pytester, monkeypatch)
