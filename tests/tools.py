"""What tests share: programs that some of them need, and how many examples they draw."""

import os
import shutil

import pytest

EXPLORING = bool(os.environ.get("GUARDBIT_EXPLORE"))


def examples(count: int) -> int:
    """Return how many examples to draw: `count`, or twenty times as many when exploring."""
    return 20 * count if EXPLORING else count


def needs(*programs: str) -> None:
    """Skip the test, and say so, where a program is missing; fail it where all are required."""
    missing = [name for name in programs if shutil.which(name) is None]
    if not missing:
        return
    said = f"not installed: {', '.join(missing)}"
    if os.environ.get("GUARDBIT_REQUIRE_TOOLS"):
        pytest.fail(said)
    pytest.skip(said)
