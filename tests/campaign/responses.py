"""The `response` fit against `nearest` and `gain`: five kernels at 4, 6 and 8 bits.

    python tests/campaign/responses.py [--seconds 60] [--kernel gaussian] [--bits 4 6 8]

Deviations are the largest |fitted - ideal| over all frequencies, as guaranteed, in dB below the
ideal gain at DC (where that is zero, below the largest ideal gain). All fits have the same frac.
Exit status 1 if a `response` fit deviates more than `nearest`.
"""

from __future__ import annotations

import argparse
import sys
from dataclasses import dataclass, replace
from math import log10
from pathlib import Path

from guardbit.fit.resolve import resolve
from guardbit.model.enums import FitRule
from guardbit.model.finding import SpecError
from guardbit.model.spec import Spec
from guardbit.sizing.frequency import frequency
from guardbit.spec.reader import parse_spec
from guardbit.study.response.fit import fit_response
from guardbit.study.response.pins import pin_fit

EXAMPLES = Path(__file__).parents[2] / "examples"

KERNELS = {
    "gaussian 7x7, sigma 1.2": 'formula = "gaussian"\nsize = 7\nsigma = 1.2',
    "label_psf": 'file = "data/label_psf.csv"\ndivisor = "sum"',
    # a Laplacian of Gaussian, of least and greatest tap -2 and 16, over 23
    "LoG 5x5 / 23": (
        "taps = [[0, 0, -1, 0, 0], [0, -1, -2, -1, 0], [-1, -2, 16, -2, -1], "
        "[0, -1, -2, -1, 0], [0, 0, -1, 0, 0]]\ndivisor = 23"
    ),
    "unsymmetric 5x5 (ours)": (
        "taps = [[3, 17, 24, 9, 1], [11, 53, 67, 31, 6], [19, 71, 101, 47, 12], "
        '[8, 29, 58, 37, 15], [2, 7, 13, 18, 5]]\ndivisor = "sum"'
    ),
    # Malvar, He and Cutler 2004, G at R; over 8, with a white-balance gain of 1.37
    "Malvar G at R * 1.37": (
        "taps = [[0, 0, -1.37, 0, 0], [0, 0, 2.74, 0, 0], [-1.37, 2.74, 5.48, 2.74, -1.37], "
        "[0, 0, 2.74, 0, 0], [0, 0, -1.37, 0, 0]]\ndivisor = 8"
    ),
}


@dataclass(frozen=True)
class Row:
    """One kernel at one width; deviations in dB, the gap in percent of the deviation."""

    kernel: str
    bits: int
    frac: int
    nearest: str
    gain: str
    response: str
    gap: str
    proved: str
    seconds: str
    worse: bool


def spec_of(kernel: str, bits: int) -> tuple[Spec, str]:
    """Return the spec of a kernel at a width, and its text."""
    text = (
        f'[filter]\nname = "candidate"\n[kernel]\n{KERNELS[kernel]}\n[input]\nbits = 8\n'
        f'[coefficient]\nbits = {bits}\nfit = "response"\n'
    )
    return parse_spec(text, kernel, EXAMPLES), text


def decibels(spec: Spec) -> str:
    """Return the deviation of a spec's taps in dB, "none" where they are exact."""
    try:
        found = frequency(resolve(spec))
    except SpecError:
        return "unfit"
    if not found.deviation:
        return "none"
    return f"{20 * log10(found.deviation / found.reference):.2f}"


def row(kernel: str, bits: int, seconds: float) -> Row:
    """Return the fits of a kernel at a width."""
    spec, text = spec_of(kernel, bits)
    fit = fit_response(spec, seconds)
    (found,) = fit.factors
    pinned = parse_spec(pin_fit(spec, text, fit), kernel, EXAMPLES)
    table = replace(spec.coefficient, frac=(found.frac,))
    nearest, gain = (
        decibels(replace(spec, coefficient=replace(table, fit=rule)))
        for rule in (FitRule.NEAREST, FitRule.GAIN)
    )
    return Row(
        kernel,
        bits,
        found.frac,
        nearest,
        gain,
        decibels(pinned),
        f"{100 * float(found.gap):.2f}",
        "yes" if found.proved else "no",
        fit.seconds,
        found.nearest is not None and found.deviation > found.nearest,
    )


HEAD = ("kernel", "bits", "frac", "nearest", "gain", "response", "gap %", "proved", "seconds")


def main() -> int:
    """Print one row for each kernel and width; return the exit status."""
    parser = argparse.ArgumentParser(description="response fits against the other two")
    parser.add_argument("--seconds", type=float, default=60)
    parser.add_argument("--bits", type=int, nargs="+", default=[4, 6, 8])
    parser.add_argument("--kernel", default="", help="only kernels with this in their name")
    options = parser.parse_args()
    shape = "{:<24}{:>5}{:>5}{:>9}{:>9}{:>10}{:>8}{:>8}{:>9}"
    print(shape.format(*HEAD))
    worse = 0
    for kernel in (name for name in KERNELS if options.kernel in name):
        for bits in options.bits:
            r = row(kernel, bits, options.seconds)
            cells = (r.kernel, r.bits, r.frac, r.nearest, r.gain, r.response, r.gap, r.proved)
            print(shape.format(*cells, r.seconds), flush=True)
            worse += r.worse
    return 1 if worse else 0


if __name__ == "__main__":
    sys.exit(main())
