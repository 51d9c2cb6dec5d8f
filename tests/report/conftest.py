"""What the tests of the harness and of the pages share is imported by the name of its file."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1] / "testing"))
sys.path.insert(0, str(Path(__file__).parent))
