"""From a spec as written to the arithmetic contract with nothing left open."""

from guardbit.fit.coefficients import Fitted, fit
from guardbit.fit.factors import factors
from guardbit.fit.formats import border_value, formats
from guardbit.fit.geometry import geometry
from guardbit.fit.open import open_findings
from guardbit.fit.passes import passes, preload_findings
from guardbit.fit.registers import nominal_findings, with_register_bits
from guardbit.model.filter import Border, Filter
from guardbit.model.finding import Finding, SpecError
from guardbit.model.spec import Spec


def resolve(spec: Spec) -> Filter:
    """Return the filter of a spec: every default and every "auto" resolved, taps fitted.

    One thing stays open: an accumulator with bits "auto" has None, for sizing to fill in.
    Raises SpecError with all findings: taps that the coefficient register does not hold, keys
    that contradict each other, codes outside a resolved format; or with the word lengths that
    are left to a search.
    """
    if found := open_findings(spec):
        raise SpecError(*found)
    spec = with_register_bits(spec)
    pixels, format_findings = formats(spec)
    value, border_findings = border_value(spec)
    parts, part_findings = factors(spec)
    fits = [fit(spec, part) for part in parts]
    fitted = [each for each in fits if isinstance(each, Fitted)]
    whole = not part_findings and len(fitted) == len(fits)
    made = passes(spec, fitted, pixels) if whole else ()
    findings = (
        *part_findings,
        *(each for each in fits if isinstance(each, Finding)),
        *format_findings,
        *border_findings,
        *preload_findings(spec, made),
        *(found for each in fitted for found in nominal_findings(spec, each)),
    )
    if findings:
        raise SpecError(*sorted(findings, key=_line))
    return Filter(
        name=spec.filter.name,
        summary=spec.filter.summary,
        operation=spec.filter.operation,
        outside=spec.input.outside,
        passes=made,
        border=Border(spec.border.mode, value, spec.border.grid),
        geometry=geometry(spec),
        spec_digest=spec.digest,
    )


def _line(found: Finding) -> float:
    """Return the finding's line, those without one last."""
    return float("inf") if found.place.line is None else found.place.line
