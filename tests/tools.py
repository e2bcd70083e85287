"""Programs that some tests need beside a C compiler."""

import os
import shutil

import pytest


def needs(*programs: str) -> None:
    """Skip the test, and say so, where a program is missing; fail it where all are required."""
    missing = [name for name in programs if shutil.which(name) is None]
    if not missing:
        return
    said = f"not installed: {', '.join(missing)}"
    if os.environ.get("GUARDBIT_REQUIRE_TOOLS"):
        pytest.fail(said)
    pytest.skip(said)
