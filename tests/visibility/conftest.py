"""Lets the tests of this folder import `small_towns`, under any import mode."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
