"""Puts this folder on the import path: the oracle and the generators are shared by the tests.

Property tests draw the same examples in every run, so that a run that fails is one that the
change made fail. GUARDBIT_EXPLORE=1 draws new ones, many more of them.
"""

import os
import sys
from pathlib import Path

from hypothesis import settings

sys.path.insert(0, str(Path(__file__).parent))

settings.register_profile("steady", derandomize=True)
settings.register_profile("explore", max_examples=1000, deadline=None)
settings.load_profile("explore" if os.environ.get("GUARDBIT_EXPLORE") else "steady")
