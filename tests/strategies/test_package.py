"""The package: its public names, and under which name it may be imported."""

import subprocess
import sys
from pathlib import Path

import conjcheck.strategies

HOME = Path(conjcheck.strategies.__file__).resolve().parent


def test_the_public_names_are_sorted_and_there():
    """``__all__`` is sorted, names each strategy once, and each is documented with what it shrinks towards."""
    names = conjcheck.strategies.__all__
    assert names == sorted(set(names))
    for name in names:
        page = getattr(conjcheck.strategies, name).__doc__
        assert "hrinks towards" in page
        assert "Cost:" in page


def test_another_name_is_refused_with_a_remedy():
    """``import strategies`` next to the folder fails, and the message says what to write instead."""
    run = subprocess.run([sys.executable, "-c", "import strategies"], cwd=HOME.parent, capture_output=True, text=True, check=False)
    assert run.returncode == 1
    assert "ImportError: expected this package to be imported as conjcheck.strategies, got 'strategies'" in run.stderr
    assert "from conjcheck.strategies import rows" in run.stderr


def test_strategies_know_geometry_only():
    """No file here imports the oracle or anything above it."""
    for file in HOME.glob("*.py"):
        for line in file.read_text().splitlines():
            if line.lstrip().startswith(("import conjcheck", "from conjcheck")):
                room = line.split()[1]
                assert room.startswith(("conjcheck.geometry.", "conjcheck.strategies.")) or room == "conjcheck.errors", (
                    file.name,
                    line,
                )
