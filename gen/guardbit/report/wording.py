"""The sentence of every finding. Its words stand in the tables of the modules words_*.

A table maps a kind to (what is wrong, what would be right); names in braces are filled from
the finding's values.
"""

from guardbit.model.finding import Finding, Place
from guardbit.report import (
    words_cli,
    words_defects,
    words_fit,
    words_goal,
    words_proof,
    words_registers,
    words_sizing,
    words_spec,
    words_sweep,
    words_verify,
)

WORDS: dict[str, tuple[str, str]] = {
    **words_cli.WORDS,
    **words_defects.WORDS,
    **words_fit.WORDS,
    **words_goal.WORDS,
    **words_proof.WORDS,
    **words_registers.WORDS,
    **words_sizing.WORDS,
    **words_spec.WORDS,
    **words_sweep.WORDS,
    **words_verify.WORDS,
}


def sentence(finding: Finding) -> str:
    """Return "file:line: key: reason. remedy.", without the parts that are not known.

    Raises KeyError for a kind that has no words: an error in the program, not in its input.
    """
    reason, remedy = WORDS[finding.kind]
    values = {n: "unknown" if value is None else value for n, value in finding.values}
    parts = [where(finding.place), finding.place.key or ""]
    said = " ".join(_closed(text).format_map(values) for text in (reason, remedy) if text)
    return ": ".join([*filter(None, parts), said])


def where(place: Place) -> str:
    """Return "file:line", "file", or "" if the file is not known."""
    if place.file is None:
        return ""
    return place.file if place.line is None else f"{place.file}:{place.line}"


def _closed(text: str) -> str:
    """Return a template as a sentence: a capital where it begins with a word, and a full stop."""
    return f"{text[0].upper()}{text[1:].removesuffix('.')}."
