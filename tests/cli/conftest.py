"""What the tests of surveys share is imported by the name of its file."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1] / "testing"))
