"""Keeping a library's own words off standard output, which belongs to our answers."""

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager


@contextmanager
def quiet_output() -> Iterator[None]:
    """Send what compiled code writes to file descriptor 1 nowhere, for a while.

    HiGHS prints a line in rare cases whatever its options say. Without a descriptor 1 nothing
    is done. Not for use in several threads at once.
    """
    sys.stdout.flush()
    try:
        kept = os.dup(1)
    except OSError:
        yield
        return
    nowhere = os.open(os.devnull, os.O_WRONLY)
    try:
        os.dup2(nowhere, 1)
        yield
    finally:
        os.dup2(kept, 1)
        os.close(kept)
        os.close(nowhere)
