"""Every way in which a proof can end has its words."""

import re
from pathlib import Path

from guardbit.report.words_proof import WORDS
from guardbit.verify.refusals import REFUSALS, undecided

PROOF = Path(__file__).parents[2] / "gen" / "guardbit" / "proof"
SOURCE = "\n".join(path.read_text() for path in sorted(PROOF.rglob("*.py")))
BROKEN = r'(?:\.broken|Difference|BrokenError|\.within)\(\s*(?:value, (?:kind|word), )?"([a-z-]+)"'
REFUSED = (
    r'(?:\.refused|InexpressibleError|RefusedError)\(\s*"([a-z-]+)"'
    r'|\.refuse\(\s*[\w.]+, "([a-z-]+)"'
)


def test_broken_rules_and_differences() -> None:
    kinds = set(re.findall(BROKEN, SOURCE)) | {"arithmetic-shift", "narrowing", "signed-overflow"}
    assert len(kinds) > 15
    assert {f"proof-{kind}" for kind in kinds} <= set(WORDS)


def test_refusals() -> None:
    kinds = {a or b for a, b in re.findall(REFUSED, SOURCE)}
    assert len(kinds) > 40
    assert kinds - set(REFUSALS) == set()
    assert set(REFUSALS) - kinds <= {"error-directive"}


def test_what_was_found_but_not_shown_is_named() -> None:
    assert undecided("signed-overflow") == "signed overflow, which no frame was found for"
    assert undecided("no-end") == "a run that takes too many steps"
