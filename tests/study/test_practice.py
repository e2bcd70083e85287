"""The error that frames show, and registers that are too narrow for them."""

from collections.abc import Callable
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest
from skimage import data

import oracle
from guardbit.fit.resolve import resolve
from guardbit.model.enums import Overflow
from guardbit.model.routine import Codes
from guardbit.model.sizing import Sizing
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec
from guardbit.study.noise import measured, snr
from guardbit.study.practice import practice
from guardbit.study.sheet import sheet

SHARP = "[kernel]\ntaps = [[0, -1, 0], [-1, 5, -1], [0, -1, 0]]\n[input]\nbits = 4\n"
PAIR = (
    "[kernel]\ncolumn = [1, 3, -1]\nrow = [2, -1]\ndivisor = [4, 1]\n"
    "[coefficient]\nfrac = ['auto', 'auto']\n[input]\nbits = 4\n[intermediate]\nbits = 6\n"
    "[intermediate.accumulator]\nbits = {first}\noverflow = '{how}'\n"
    "[accumulator]\nbits = {second}\noverflow = '{then}'\n"
)


def text(tables: str) -> str:
    return '[filter]\nname = "one"\n' + tables


def sized(tables: str) -> Sizing:
    return analyse(resolve(parse_spec(text(tables), "a.toml", Path())))


def camera() -> Codes:
    """The photograph of a photographer that scikit-image carries (CC0)."""
    read: Callable[[], Codes] = data.camera
    return read()[:, :, None].astype(np.int64)


def test_moments_of_the_error_by_hand() -> None:
    """Codes 1 2 3 halved: 0.5 1 1.5 become 1 1 2, so that the errors are 1/2, 0 and 1/2."""
    f = sized("[kernel]\ntaps = [[1]]\ndivisor = 2\n[input]\nbits = 8\n").filter
    found = measured(f, [np.array([[[1], [2], [3]]])])
    assert found is not None
    assert (found.outputs, found.least, found.greatest) == (3, Fraction(0), Fraction(1, 2))
    assert (found.mean, found.power) == (Fraction(1, 3), Fraction(1, 6))
    assert found.variance == Fraction(1, 6) - Fraction(1, 9)
    assert found.signal == Fraction(1, 3) * (Fraction(1, 4) + 1 + Fraction(9, 4))
    assert found.snr == 7


def test_no_error_has_no_ratio_and_illegal_frames_do_not_count() -> None:
    f = sized("[kernel]\ntaps = [[1]]\n[input]\nbits = 8\nrange = [0, 9]\n").filter
    assert snr(f, [np.array([[[3]]])]) is None
    assert measured(f, [np.array([[[10]]])]) is None
    assert snr(f, [np.array([[[10]]])]) == snr(f, []) == 0


def test_the_ratio_is_that_of_floats_on_a_photograph() -> None:
    f = sized(
        "[kernel]\nformula = 'gaussian'\nsize = 3\nsigma = 0.8\ndivisor = 'sum'\n"
        "[coefficient]\nbits = 6\n[input]\nbits = 8\npedestal = 16\n"
        "[output]\npedestal = 16\n[border]\nmode = 'replicate'\n"
    ).filter
    frame = camera()[:64, :64]
    terms = f.passes[0].kernel.terms
    padded = np.pad(frame[:, :, 0] - 16.0, 1, mode="edge")
    ideal = sum(float(t.ideal) * padded[1 + t.dy : 65 + t.dy, 1 + t.dx : 65 + t.dx] for t in terms)
    whole = sum(t.integer * padded[1 + t.dy : 65 + t.dy, 1 + t.dx : 65 + t.dx] for t in terms)
    scale = 2.0 ** f.passes[0].requantiser.exponent
    code = np.clip(np.floor(whole * scale + 0.5) + 16, 0, 255)
    clamped = np.clip(ideal + 16, 0, 255)
    wanted = np.mean((clamped - 16) ** 2) / np.mean((code - clamped) ** 2)
    found = snr(f, [frame])
    assert found is not None and abs(float(found) / wanted - 1) < 1e-9


@pytest.mark.parametrize("name", ["one pass", "two passes"])
def test_narrow_registers_do_what_the_oracle_says(name: str) -> None:
    """Each register in turn, at every width and policy, against the plain-integer oracle."""
    rng = np.random.default_rng(5)
    frames = [rng.integers(0, 16, (6, 7, 1)) for _ in range(2)]
    safe = dict.fromkeys(("how", "then"), "forbid") | dict.fromkeys(("first", "second"), "'auto'")
    one = SHARP + "[accumulator]\nbits = {second}\noverflow = '{then}'\n"
    tables = one if name == "one pass" else PAIR
    keys = [("second", "then")] if name == "one pass" else [("first", "how"), ("second", "then")]
    found = practice(sized(tables.format(**safe)), frames)
    plain = _outputs(text(tables.format(**safe)), frames)
    rows = 0
    for register, (width, policy) in zip(found.registers, keys, strict=True):
        least = max(2, register.safe - 6)
        assert [row.bits for row in register.rows[::2]] == list(range(least, register.safe + 1))
        for row in register.rows:
            settings = safe | {width: str(row.bits), policy: row.policy.value}
            away = abs(_outputs(text(tables.format(**settings)), frames) - plain)
            assert row.outputs == away.size
            assert row.differing == np.count_nonzero(away)
            assert (row.largest, row.total) == (away.max(), away.sum())
            rows += row.differing > 0
        assert all(
            r.overflowed == r.differing == 0 for r in register.rows if r.bits == register.safe
        )
    assert rows > 8


def _outputs(spec: str, frames: list[Codes]) -> Codes:
    contract = oracle.load(spec)
    return np.array([oracle.run(contract, frame.tolist())[0] for frame in frames])


def test_sums_that_overflow_are_counted() -> None:
    """Five times 15, less nothing: the sum 75 needs 8 bits signed; 60 fits 7 of them."""
    tables = "[kernel]\ntaps = [[5]]\n[input]\nbits = 4\n[output]\nbits = 8\n"
    (register,) = practice(sized(tables), [np.array([[[15], [12]]])]).registers
    assert register.safe == 8
    rows = {(row.bits, row.policy): row for row in register.rows}
    wrapped, clamped = rows[7, Overflow.WRAP], rows[7, Overflow.SATURATE]
    assert (wrapped.sums, wrapped.overflowed, clamped.overflowed) == (2, 1, 1)
    # 75 wraps to -53, which the output clamps to 0; it clamps to 63
    assert (wrapped.largest, clamped.largest) == (75, 12)


def test_no_width_makes_an_unsigned_register_safe_from_sums_below_zero() -> None:
    tables = "[kernel]\ntaps = [[-1, 2]]\n[input]\nbits = 4\n[accumulator]\nbits = 8\n"
    unsigned = tables + "signed = false\noverflow = 'wrap'\n"
    frame = np.array([[[9], [3], [1]]])
    (register,) = practice(sized(unsigned), [frame]).registers
    # -9 + 6 and -3 + 2 are below zero, and so is the last with a constant border of 0
    assert register.is_never_safe and register.rows[-1].overflowed > 0
    (signed,) = practice(sized(tables), [frame]).registers
    assert not signed.is_never_safe and signed.rows[-1].overflowed == 0


def test_a_photograph_is_taken_as_it_is_where_it_fits() -> None:
    eight, four = (sized(f"[kernel]\ntaps = [[1, 2]]\n[input]\nbits = {b}\n") for b in (8, 4))
    found = sheet(eight, {"camera": camera()})
    assert found.photographs == ("camera",)
    assert found.measured is not None and found.measured.outputs == camera().size
    assert sheet(four, {"camera": camera()}).photographs != ("camera",)
