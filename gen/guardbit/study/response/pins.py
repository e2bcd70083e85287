"""What a search found, written into the spec."""

from guardbit.model.enums import FitRule
from guardbit.model.frequency import FactorFit, ResponseFit
from guardbit.model.spec import Spec
from guardbit.spec.pinning import PinValue, pinned_text
from guardbit.study.response.fit import fit_response


def pin_response(spec: Spec, text: str, seconds: float = 60.0) -> str:
    """Return the text of a spec with the integers of its `response` fit pinned.

    `text` is what `spec` was read from. Raises what `fit_response` raises.
    """
    return pin_fit(spec, text, fit_response(spec, seconds))


def pin_fit(spec: Spec, text: str, found: ResponseFit) -> str:
    """Return the text of a spec with a fit pinned: its integers, and the frac they stand at.

    `coefficient.fit` says how they were found, and is set where it says otherwise.
    """
    fits = found.factors
    paired = len(fits) == 2
    values: dict[str, PinValue] = {
        "coefficient.frac": [each.frac for each in fits] if paired else fits[0].frac,
        "coefficient.pinned": dict(map(_vector, fits)) if paired else _rows(fits[0]),
    }
    if spec.coefficient.fit is not FitRule.RESPONSE:
        values = {"coefficient.fit": FitRule.RESPONSE.value, **values}
    return pinned_text(text, values)


def _rows(fit: FactorFit) -> PinValue:
    return [list(row) for row in fit.integers]


def _vector(fit: FactorFit) -> tuple[str, PinValue]:
    return fit.name, [tap for row in fit.integers for tap in row]
