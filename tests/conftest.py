"""Puts this folder on the import path: the oracle and the generators are shared by the tests."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
