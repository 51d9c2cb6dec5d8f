"""The rules and the definitions they are held to are imported by the names of their files."""

import sys
from pathlib import Path

HERE = Path(__file__).parent
sys.path[:0] = [str(HERE), str(HERE.parents[1] / "conjectures")]
