"""The tests here import their own `site_cases` by its bare name: `site` is a module of the standard library."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
