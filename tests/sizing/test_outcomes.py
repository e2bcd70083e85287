"""What `unmet` says would come out of a register that is too narrow, against the definitions."""

import random
from dataclasses import replace

import pytest

from guardbit.model.enums import BorderMode, Overflow
from guardbit.model.filter import Accumulator, Filter
from guardbit.model.finding import Finding
from guardbit.model.sizing import RegisterSizing, Witness
from guardbit.report.wording import sentence
from guardbit.sizing.analyse import analyse, unmet

from .shown import left_holding
from .small import AUTO, code, column_then_row, pixels, plain, to_output
from .test_sizing_exhaustive import has_output, random_double, random_single


def narrowed(f: Filter, which: int, bits: int, overflow: Overflow) -> Filter:
    """The filter with one accumulator of that width and policy, and the others wide."""
    passes = [replace(p, accumulator=replace(AUTO, bits=60)) for p in f.passes]
    p = f.passes[which]
    signed, preload = p.accumulator.signed, p.accumulator.preload
    passes[which] = replace(p, accumulator=Accumulator(bits, signed, overflow, preload))
    return replace(f, passes=tuple(passes))


def shown(r: RegisterSizing, found: Finding) -> Witness:
    """The frame that a finding describes."""
    end = found.value("end")
    return next(w for w in r.witnesses if w.partial and w.end.value == end)


def check(f: Filter, which: int, bits: int) -> list[str]:
    narrow = narrowed(f, which, bits, Overflow.FORBID)
    made = analyse(narrow)
    r = made.registers[which]
    found = [x for x in unmet(made) if str(x.kind).startswith("accumulator-")]
    if r.signed or r.partial.low >= 0:
        assert bool(found) == (r.bits_forbid > bits)
    for each in found:
        witness = shown(r, each)
        for name, overflow in (("wrapped", Overflow.WRAP), ("saturated", Overflow.SATURATE)):
            other = narrowed(f, which, bits, overflow)
            held = left_holding(other, witness, which)
            assert each.value(name) == held
            assert each.value(f"{name}_code") == code(other.passes[which], held)
        total = left_holding(narrow, witness, which)
        assert (each.value("final"), each.value("code")) == (total, code(f.passes[which], total))
        low = -(2 ** (bits - 1)) if r.signed else 0
        fits = low <= r.final.low and r.final.high < low + 2**bits
        assert each.kind.endswith("-wrap") == fits
        assert "{" not in sentence(each)
    return [each.kind for each in found]


def test_outcomes_against_the_definitions() -> None:
    rng = random.Random("outcomes")
    kinds: list[str] = []
    for _ in range(800):
        f = (random_single if rng.random() < 0.5 else random_double)(rng)
        if has_output(f):
            which = rng.randrange(len(f.passes))
            kinds += check(f, which, rng.choice([3, 4, 5]))
    for kind in ("accumulator-too-narrow", "accumulator-negative"):
        assert kinds.count(kind) > 3
        assert kinds.count(f"{kind}-wrap") > 1


def test_the_message_for_a_person() -> None:
    """Worked by hand: 255 * 16 = 4080, less 4096 is -16; 4080 / 16 = 255 and 2047 / 16 = 127.9."""
    narrow = replace(AUTO, bits=12)
    taps = [(1, 2, 1), (2, 4, 2), (1, 2, 1)]
    (found,) = unmet(analyse(plain(taps, pixels(8), narrow, to_output(4))))
    assert sentence(found) == (
        "accumulator.bits: A sum in the accumulator reaches 4080, beyond the 2047 that 12 bits "
        "hold: in a frame of 3 rows by 3 columns, at output row 1, column 1, after 9 taps. The sum "
        "ends there at 4080, a register of that width at -16 if it wraps and at 2047 if it "
        "saturates: output code 0 or 128, where 255 is right. Set accumulator.bits to at least 13, "
        "or to auto; or say with accumulator.overflow that it may wrap or saturate."
    )


@pytest.mark.parametrize("bits", [6, 7])
def test_wrapping_is_named_where_every_final_sum_fits(bits: int) -> None:
    """Codes 16..17: three of them less two are 14..19, six bits; three alone are 51, seven."""
    narrow = replace(AUTO, bits=bits)
    f = plain([(1, 1, 1, -1, -1)], pixels(8, legal=(16, 17)), narrow)
    found = unmet(analyse(f))
    assert [each.kind for each in found] == ["accumulator-too-narrow-wrap"][: 7 - bits]
    for each in found:
        assert 'with accumulator.overflow = "wrap" no result changes at 6 bits' in sentence(each)
    passes = (replace(f.passes[0], accumulator=replace(narrow, overflow=Overflow.WRAP)),)
    assert unmet(analyse(replace(f, passes=passes))) == ()


def test_a_first_pass_tells_the_intermediate_code() -> None:
    middle = to_output(1, pixels(8))
    both = (replace(AUTO, bits=10), AUTO)
    first, second = ((1, 2, 1), pixels(8), middle), ((1,), to_output())
    f = column_then_row(first, second, BorderMode.HALF_SAMPLE, accumulators=both)
    (found,) = unmet(analyse(f))
    assert found.value("stage") == "intermediate"
    assert found.value("register") == "intermediate.accumulator"
    # 4 * 255 = 1020 wraps to -4 in 10 bits, and 511 is the most that they hold
    assert [found.value(n) for n in ("final", "wrapped", "saturated")] == [1020, -4, 511]
    assert [found.value(n) for n in ("code", "wrapped_code", "saturated_code")] == [255, 0, 255]
