"""Tests import their own helpers by folder: `from exposure.media import …`."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
