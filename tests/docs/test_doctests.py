"""Every example in a docstring runs and gives what it shows."""

import doctest
import importlib
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
NAMES = sorted(
    ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__")
    for path in (ROOT / "conjcheck").rglob("*.py")
    if "strategies" not in path.parts
) + sorted(f"conjcheck.strategies.{path.stem}".removesuffix(".__init__") for path in (ROOT / "strategies").glob("*.py"))


@pytest.mark.parametrize("name", NAMES)
def test_examples_of(name):
    """The examples of the module hold."""
    assert doctest.testmod(importlib.import_module(name)).failed == 0


def test_there_are_examples():
    """The public pages carry examples."""
    finder = doctest.DocTestFinder()
    count = sum(len(test.examples) for name in NAMES for test in finder.find(importlib.import_module(name)))
    assert count > 45
