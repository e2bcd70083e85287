"""The word lengths that a spec with a goal leaves to a search."""

from guardbit.fit.places import place
from guardbit.model.enums import Scale
from guardbit.model.finding import Finding, finding
from guardbit.model.spec import Auto, Spec

COEFFICIENT_BITS, COEFFICIENT_FRAC = "coefficient.bits", "coefficient.frac"
INTERMEDIATE_BITS, INTERMEDIATE_FRAC = "intermediate.bits", "intermediate.frac"


def open_words(spec: Spec) -> tuple[str, ...]:
    """Return the keys that a search has to find: none without a goal.

    Those are coefficient and intermediate bits and frac that are "auto" or left out. Pinned
    taps and an exact scale leave nothing of the coefficients to choose. An accumulator that
    is "auto" follows from the rest.
    """
    if spec.goal is None:
        return ()
    found = []
    table, between = spec.coefficient, spec.intermediate
    if table.pinned is None and table.scale is Scale.BINARY:
        if isinstance(table.bits, Auto):
            found.append(COEFFICIENT_BITS)
        if any(isinstance(frac, Auto) for frac in table.frac):
            found.append(COEFFICIENT_FRAC)
    if between is not None:
        if isinstance(between.bits, Auto):
            found.append(INTERMEDIATE_BITS)
        if not isinstance(between.frac, int):
            found.append(INTERMEDIATE_FRAC)
    return tuple(found)


def open_findings(spec: Spec) -> tuple[Finding, ...]:
    """Return a finding for every word that is left to a search, with a goal or without."""
    keys = dict.fromkeys(open_words(spec))
    between = spec.intermediate
    if between is not None:
        given = {INTERMEDIATE_BITS: between.bits, INTERMEDIATE_FRAC: between.frac}
        keys |= dict.fromkeys(key for key, value in given.items() if isinstance(value, Auto))
    return tuple(finding("word-open", place(spec, key), got=key) for key in keys)
