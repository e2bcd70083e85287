"""Sizing over sets of coefficients, against every loading and every frame of a small filter."""

import time
from dataclasses import dataclass
from fractions import Fraction
from functools import cache
from itertools import product
from pathlib import Path

import numpy as np
import pytest

from guardbit.arith.tapset import is_member
from guardbit.fit.resolve import resolve
from guardbit.model.enums import Overflow
from guardbit.model.filter import Filter, TapSet, loaded, registers_of
from guardbit.model.sizing import ErrorPart, Interval, Sizing, Witness
from guardbit.reference.run import respond
from guardbit.sizing.analyse import analyse, unmet
from guardbit.sizing.loadable import ANY_ROUNDING
from guardbit.sizing.order import tap_orders
from guardbit.spec.reader import parse_spec
from guardbit.vectors.witnesses import witness_frame

SETS = {
    "limits": "least = [[-2, -1, 0]], greatest = [[1, 2, 3]]",
    "sum": "least = -2, greatest = 2, sum = 1",
    "magnitudes": "least = [[-3, -1, -2]], greatest = [[2, 3, 1]], sum = 1, magnitudes = 4",
    "kernels": "kernels = [[[1, 0, 0]], [[1, -2, 3]], [[0, 4, -1]]]",
    "two": "least = [[-3, 0, 1]], greatest = [[3, 0, 2]], sum = 2",
    "mean": "least = 0, greatest = 4, sum = 4",
}
NOMINAL = {
    "limits": [[1, -1, 1]],
    "sum": [[1, -1, 1]],
    "magnitudes": [[1, -1, 1]],
    "kernels": [[1, 0, 0]],
    "two": [[1, 0, 1]],
    "mean": [[1, 2, 1]],
}
BORDERS = {
    "constant": "[border]\nmode = 'constant'\n",
    "replicate": "[border]\nmode = 'replicate'\n",
    "periodic": "[border]\nmode = 'periodic'\n",
    "half-sample": "[border]\nmode = 'half-sample'\n",
    "far": "[border]\nmode = 'constant'\nvalue = 0\n",
}
INPUTS = {"plain": "bits = 2\n", "range": "bits = 3\nrange = [1, 3]\npedestal = 2\n"}
LENGTHS = (1, 2, 3, 4)


def filter_of(
    name: str, border: str, source: str, rest: str = "", output: str = "bits = 16\nsigned = true\n"
) -> Filter:
    text = (
        f"[filter]\nname = 'one'\n[kernel]\ntaps = {NOMINAL[name]}\n[input]\n{INPUTS[source]}"
        f"[coefficient]\nfrac = 0\nregisters = {{ {SETS[name]} }}\n"
        f"[output]\n{output}{BORDERS[border]}{rest}"
    )
    return resolve(parse_spec(text, "a.toml", Path()))


def members(s: TapSet) -> list[tuple[int, ...]]:
    limits = (range(low, high + 1) for low, high in zip(s.least, s.greatest, strict=True))
    return [taps for taps in product(*limits) if is_member(s, taps)]


@dataclass(frozen=True)
class Seen:
    """The least and greatest of what all loadings make of all frames."""

    accumulator: Interval
    output: Interval


def seen(f: Filter, lengths: tuple[int, ...] = LENGTHS) -> Seen:
    s = registers_of(f)
    assert s is not None
    codes = range(f.input.low, f.input.high + 1)
    # every frame of a length at once: one row of the image for each, as rows are independent
    frames = [np.array(list(product(codes, repeat=n)))[:, :, None] for n in lengths]
    made = [respond(loaded(f, taps), frame) for taps in members(s) for frame in frames]
    return Seen(ends([r.accumulators[0] for r in made]), ends([r.output for r in made]))


def ends(arrays: list[np.ndarray]) -> Interval:
    return Interval(min(int(a.min()) for a in arrays), max(int(a.max()) for a in arrays))


def check_witness(sizing: Sizing, witness: Witness) -> None:
    """Runs the frame with the taps that it names."""
    f, s = sizing.filter, registers_of(sizing.filter)
    assert s is not None and witness.taps is not None and is_member(s, witness.taps)
    response = respond(loaded(f, witness.taps), witness_frame(witness, 1))
    at = (*witness.position, 0)
    if witness.register == "output":
        assert response.output[at] == witness.value
    elif not witness.partial:
        assert response.accumulators[0][at] == witness.value


@cache
def unlimited(name: str, border: str, source: str) -> Interval:
    return seen(analyse(filter_of(name, border, source)).filter).accumulator


@pytest.mark.parametrize("border", BORDERS)
@pytest.mark.parametrize("source", INPUTS)
@pytest.mark.parametrize("name", SETS)
def test_finals_are_those_of_every_loading_and_frame(name: str, source: str, border: str) -> None:
    sizing = analyse(filter_of(name, border, source))
    (register,) = sizing.registers
    found = unlimited(name, border, source)
    assert register.exact or (border, source) == ("far", "range")
    if register.exact:
        assert register.final == register.held == found
        assert len(register.witnesses) == 4
    else:
        assert register.final.low <= found.low and found.high <= register.final.high
    for witness in register.witnesses:
        check_witness(sizing, witness)
    assert sizing.requantisers[0].output == register.final


@pytest.mark.parametrize("name", SETS)
def test_partial_sums_are_those_of_every_loading(name: str) -> None:
    f = filter_of(name, "replicate", "plain")
    s = registers_of(f)
    assert s is not None
    (register,) = analyse(f).registers
    partial = [
        sum(k * x for k, x in zip(taps[:n], pixels, strict=False))
        for taps in members(s)
        for pixels in product(range(4), repeat=len(s.cells))
        for n in range(len(s.cells) + 1)
    ]
    assert register.partial == Interval(min(partial), max(partial))
    for witness in register.witnesses:
        if witness.partial:
            assert witness.value in (min(partial), max(partial))


@pytest.mark.parametrize("name", SETS)
@pytest.mark.parametrize("border", ["constant", "replicate"])
@pytest.mark.parametrize("policy", ["wrap", "saturate"])
@pytest.mark.parametrize("bits", [3, 4, 5])
def test_what_a_narrow_register_holds(name: str, border: str, policy: str, bits: int) -> None:
    rest = f"[accumulator]\nbits = {bits}\noverflow = '{policy}'\n"
    sizing = analyse(filter_of(name, border, "plain", rest))
    (register,) = sizing.registers
    found = seen(sizing.filter, (1, 2, 3))
    if register.held_exact:
        assert register.held == found.accumulator
    assert register.held.low <= found.accumulator.low
    assert register.held.high >= found.accumulator.high
    for witness in register.held_witnesses:
        check_witness(sizing, witness)


@pytest.mark.parametrize("name", SETS)
@pytest.mark.parametrize("bits", [2, 3])
def test_codes_that_wrap(name: str, bits: int) -> None:
    output = f"bits = {bits}\nsigned = true\noverflow = 'wrap'\n"
    sizing = analyse(filter_of(name, "replicate", "plain", output=output))
    (requantiser,) = sizing.requantisers
    found = seen(sizing.filter, (1, 2, 3)).output
    assert requantiser.output.low <= found.low and found.high <= requantiser.output.high
    if requantiser.output_exact:
        assert requantiser.output == found
    for witness in requantiser.witnesses:
        check_witness(sizing, witness)


@pytest.mark.parametrize("widths", ["[1, 1]", "[1, 2]", "[2, 2]"])
@pytest.mark.parametrize("name", SETS)
@pytest.mark.parametrize("border", ["replicate", "periodic", "constant"])
def test_images_too_small_for_the_box(name: str, border: str, widths: str) -> None:
    rest = f"[image]\nwidth = {widths}\n"
    sizing = analyse(filter_of(name, border, "plain", rest))
    (register,) = sizing.registers
    least, greatest = (int(c) for c in widths.strip("[]").split(","))
    found = seen(sizing.filter, tuple(range(least, greatest + 1))).accumulator
    if register.exact or name == "kernels":
        assert register.exact and register.final == found
    assert register.final.low <= found.low and found.high <= register.final.high
    for witness in register.witnesses:
        check_witness(sizing, witness)


def test_auto_takes_the_least_width_over_the_set() -> None:
    (register,) = analyse(filter_of("mean", "replicate", "plain")).registers
    # 4 * 3 and the sign; limits alone would say 3 * 4 * 3, which takes two bits more
    assert register.bits == 5 and register.exact
    # sum of magnitudes 4, pixel 3: 2 + 2 + 1 bits; taps of 3 bits, three of them: 3 + 2 + 2 + 1
    assert (register.rule_l1, register.rule_count) == (5, 8)


def test_no_order_is_advised_for_a_set() -> None:
    assert tap_orders(analyse(filter_of("sum", "replicate", "plain")).filter) == ()


def test_the_error_is_that_of_the_kernel_itself() -> None:
    sizing = analyse(filter_of("mean", "replicate", "plain", "", "frac = -1\n"))
    # halves round up, and the kernel is exact
    assert (sizing.error.low, sizing.error.high) == (Fraction(0), Fraction(1, 2))
    assert sizing.error.parts[-1] == ErrorPart(ANY_ROUNDING, Fraction(0), Fraction(1, 2))


def test_a_width_that_is_enough_for_the_kernel_itself_only() -> None:
    text = (
        "[filter]\nname = 'wide'\n[kernel]\ntaps = [[1]]\n[input]\nbits = 16\n[coefficient]\n"
        "bits = 32\nfrac = 0\n{registers}[output]\nbits = 32\nsigned = true\n"
        "[accumulator]\nbits = {bits}\n"
    )

    def found(bits: int, registers: str = "") -> list[str]:
        made = text.format(bits=bits, registers=registers)
        return [each.kind for each in unmet(analyse(resolve(parse_spec(made, "a.toml", Path()))))]

    loadable = "registers = { least = -2147483648 }\n"
    assert found(17) == []
    # 65535 * 2^31 takes 47 bits and the sign; the frame that shows it has those taps
    assert found(47, loadable) == ["accumulator-too-narrow"]
    assert found(48, loadable) == []


@pytest.mark.parametrize("name", SETS)
def test_a_finding_tells_what_the_loaded_taps_make(name: str) -> None:
    rest = "[accumulator]\nbits = 3\n"
    sizing = analyse(filter_of(name, "replicate", "plain", rest))
    (found,) = unmet(sizing)
    (register,) = sizing.registers
    shown = next(w for w in register.witnesses if w.partial and w.end.value == found.value("end"))
    assert shown.taps is not None
    response = respond(loaded(sizing.filter, shown.taps), witness_frame(shown, 1))
    assert sizing.filter.passes[0].accumulator.overflow is Overflow.FORBID
    assert found.value("final") == response.accumulators[0][(*shown.position, 0)]


def test_large_sets_are_sized_in_little_time() -> None:
    text = (
        "[filter]\nname = 'large'\n[kernel]\ntaps = {taps}\ndivisor = 'sum'\n[input]\nbits = 12\n"
        "[coefficient]\nbits = {bits}\nfrac = {bits}\nregisters = {{ magnitudes = 200_000 }}\n"
    )
    for side, bits in ((15, 8), (5, 16)):
        made = text.format(taps=[[1] * side] * side, bits=bits)
        begun = time.process_time()
        (register,) = analyse(resolve(parse_spec(made, "a.toml", Path()))).registers
        assert register.exact and time.process_time() - begun < 10
