"""The rules are imported by the names of their files."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[2] / "conjectures"))
