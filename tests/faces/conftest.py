"""The shapes of `face_shapes` can be imported by the tests beside it, however pytest is told to import."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
