"""What the cases of the table are put together from."""

from typing import Any

from guardbit.model.enums import (
    BorderMode,
)

Tables = dict[str, Any]

SKEW = [[1, -2, 3], [4, 5, -6]]
BLUR = [[1, 2, 1], [2, 4, 2], [1, 2, 1]]
WIDE: Tables = {"bits": 32, "signed": True}
SUMS: Tables = {"bits": 16, "signed": True}
MODES = tuple(BorderMode)
FOLDING = (BorderMode.HALF_SAMPLE, BorderMode.WHOLE_SAMPLE, BorderMode.PERIODIC)
REPLICATE: Tables = {"mode": BorderMode.REPLICATE}
MIRROR: Tables = {"mode": BorderMode.HALF_SAMPLE}


def short(word: str) -> str:
    """The name of an enum's value as part of a C identifier."""
    return word.replace("-", "_").replace("ties_to", "tt").replace("toward", "tw")
