"""Puts this folder on the import path: the oracle and the generators are shared by the tests.

Property tests draw the same examples in every run, so that a run that fails is one that the
change made fail. GUARDBIT_EXPLORE=1 draws new ones, many more of them.
"""

import sys
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import settings

sys.path.insert(0, str(Path(__file__).parent))

from tools import EXPLORING, examples

settings.register_profile("steady", derandomize=True)
settings.register_profile("explore", max_examples=examples(100), deadline=None)
settings.load_profile("explore" if EXPLORING else "steady")

SOFTEN = """\
[filter]
name = "{name}"
summary = "3x3 binomial"
[kernel]
taps = [[1, 2, 1], [2, 4, 2], [1, 2, 1]]
divisor = 16
[input]
bits = 8
[accumulator]
bits = {bits}
[border]
mode = "replicate"
"""


@pytest.fixture
def soften(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return a sound spec soften3.toml in the current folder, which is a fresh one."""
    monkeypatch.chdir(tmp_path)
    return write_spec("soften3")


def write_spec(name: str, bits: str = '"auto"', file: str | None = None) -> Path:
    path = Path(file or f"{name}.toml")
    path.write_text(SOFTEN.format(name=name, bits=bits), encoding="utf-8")
    return path


@pytest.fixture
def spec_file() -> Callable[..., Path]:
    """Return a maker of specs in the current folder: (name, accumulator bits, file)."""
    return write_spec
