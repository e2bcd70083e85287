"""Rows of `size` and of the sheet that only some filters have, and decibels."""

from fractions import Fraction
from pathlib import Path

import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.decimals import lower_decibels, nearest, upper_decibels
from guardbit.model.sizing import Sizing, TapOrder
from guardbit.report.look import Look
from guardbit.report.sheet import sheet_text
from guardbit.report.terminal import size_text
from guardbit.sizing.analyse import analyse
from guardbit.sizing.order import tap_orders
from guardbit.spec.reader import parse_spec
from guardbit.study.sheet import sheet

# Codes 8..15 alone, read from the right: 5 + 5 reaches 150, where 5 - 4 + 5 - 4 stays below 128.
GROUPED = (
    "[kernel]\ntaps = [[-4, -4, 5, 5]]\n[input]\nbits = 4\nrange = [8, 15]\n"
    "[output]\nsigned = true\n[border]\nmode = 'replicate'\n"
)
UNSIGNED = (
    "[kernel]\ntaps = [[-1, 2]]\n[input]\nbits = 4\n"
    "[accumulator]\nbits = 8\nsigned = false\noverflow = 'wrap'\n"
)


def sized(tables: str) -> Sizing:
    return analyse(resolve(parse_spec('[filter]\nname = "one"\n' + tables, "a.toml", Path())))


def cells(text: str, label: str) -> list[str]:
    """Return what stands after the label in each line that begins with it."""
    lines = (line.strip() for line in text.splitlines())
    return [" ".join(line.removeprefix(label).split()) for line in lines if line.startswith(label)]


def test_a_better_tap_order_is_told_and_no_other() -> None:
    sizing = sized(GROUPED)
    orders = tap_orders(sizing.filter)
    assert orders[0].best < orders[0].contract
    (told,) = cells(size_text(Look(), sizing, orders), "best tap order")
    assert told.startswith(f"{orders[0].best} bits found")
    same = TapOrder("accumulator", 9, 9, 8, (1, 2, 3, 4))
    assert cells(size_text(Look(), sizing, [same]), "best tap order") == []


def test_the_gain_and_the_moments_of_rounding() -> None:
    """0.3 in 3 fraction bits is 2/8: off by 1/20, 12.75 LSB at 255. Residues are 0, 2, 4, 6."""
    sizing = sized(
        "[kernel]\ntaps = [[0.3]]\n[coefficient]\nfrac = 3\nbits = 4\n[input]\nbits = 8\n"
    )
    text = size_text(Look(), sizing)
    assert cells(text, "DC gain") == ["0.25 for 0.3: -12.75 LSB at full scale"]
    assert cells(text, "rounding, if busy") == ["mean +0.125, variance 0.078125"]


def test_a_gain_that_is_met() -> None:
    text = size_text(Look(), sized("[kernel]\ntaps = [[1, 2]]\n[input]\nbits = 8\n"))
    assert cells(text, "DC gain") == ["3, as ideal"]


def test_an_unsigned_register_with_sums_below_zero_is_never_called_safe() -> None:
    sizing = sized(UNSIGNED)
    for text in (size_text(Look(), sizing), sheet_text(Look(), sheet(sizing, {}))):
        assert cells(text, "needed by forbid") == ["6 bits signed"]
        assert cells(text, "spare bits") == ["none: sums below 0"]


def test_what_the_sheet_calls_attained() -> None:
    """The bound for any input is a bound only, whatever is attained without wrapping."""
    text = sheet_text(Look(), sheet(sized(UNSIGNED), {}))
    (quiet,), (loud,) = cells(text, "bound in all:"), cells(text, "for any input:")
    assert quiet.endswith("; legal frames attain both ends")
    assert loud == "never exceeded, but no frame need attain it"


@pytest.mark.parametrize(
    ("ratio", "low", "high"),
    [
        (Fraction(100), "20", "20"),
        (Fraction(1, 1000), "-30", "-30"),
        # 10 log10 2 = 3.0103
        (Fraction(2), "3.01", "3.02"),
        (Fraction(1, 2), "-3.02", "-3.01"),
        (Fraction(10**400), "4000", "4000"),
        (Fraction(0), "-infinite", "-infinite"),
    ],
)
def test_decibels_are_rounded_outward(ratio: Fraction, low: str, high: str) -> None:
    assert (lower_decibels(ratio), upper_decibels(ratio)) == (low, high)


def test_nearest_decimals() -> None:
    assert nearest(Fraction(2, 3), 2) == "0.67" and nearest(Fraction(-1, 3), 2) == "-0.33"
