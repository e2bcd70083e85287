"""Cases of what is computed: rounding, shifts, registers, two passes."""

from fit.specs import EXACT, PRELOADED, spec
from guardbit.model.enums import (
    Extent,
    First,
    Grid,
    Outside,
    Overflow,
    Rounding,
)

from .parts import BLUR, MIRROR, REPLICATE, SKEW, SUMS, WIDE, Tables, short


def roundings() -> dict[str, Tables]:
    """Each rounding by shifts, divisions and thresholds."""
    cases: dict[str, Tables] = {}
    for mode in Rounding:
        name = short(short(mode.value))
        out = {"bits": 8, "signed": True, "frac": 0, "rounding": mode}
        cases[f"{name}_shift"] = {"taps": SKEW, "input": {"frac": 5}, "output": out}
        cases[f"{name}_positive"] = {"taps": BLUR, "input": {"frac": 5}, "output": out}
        cases[f"{name}_unit"] = {"taps": SKEW, "input": {"frac": 13}, "output": out}
        cases[f"{name}_half"] = {"taps": SKEW, "input": {"frac": 12}, "output": out}
        cases[f"{name}_far"] = {"taps": SKEW, "input": {"frac": 64}, "output": out}
        for divisor in (3, 25, 100):
            cases[f"{name}_by_{divisor}"] = {
                "taps": SKEW,
                "kernel": {"divisor": (divisor,)},
                "coefficient": EXACT,
                "output": {**out, "pedestal": 3},
            }
        cases[f"{name}_up_by_24"] = {
            "taps": SKEW,
            "kernel": {"divisor": (24,)},
            "coefficient": EXACT,
            "output": {**WIDE, "frac": 3, "rounding": mode},
        }
        cases[f"{name}_wide"] = {
            "taps": [[2**31 - 1, -(2**31)], [12345, 1]],
            "coefficient": {"bits": 32},
            "input": {"bits": 16, "frac": 20},
            "output": {**WIDE, "frac": 0, "rounding": mode},
        }
    return cases


def shifts() -> dict[str, Tables]:
    """Left shifts, and outputs that wrap."""
    wrap = {"overflow": Overflow.WRAP}
    return {
        "left": {"taps": SKEW, "output": {**WIDE, "frac": 3}},
        "left_far": {"taps": SKEW, "output": {**WIDE, "frac": 50}},
        "held_to_least": {
            "taps": [[1]],
            "input": {"frac": 9},
            "output": {"frac": 0, "range": (96, 200)},
        },
        "held_to_minimum": {
            "taps": [[1]],
            "output": {**WIDE, "range": (-(2**31), -(2**31))},
        },
        "held_to_greatest": {
            "taps": [[1]],
            "input": {"frac": 9},
            "output": {**SUMS, "frac": 0, "range": (-50, -5)},
        },
        "left_to_nothing": {
            "taps": [[1]],
            "kernel": {"divisor": (5000,)},
            "coefficient": EXACT,
            "output": {"frac": 1},
        },
        "left_wrap": {"taps": SKEW, "output": {**WIDE, "frac": 30, **wrap}},
        "left_wrap_far": {"taps": SKEW, "output": {"bits": 9, "frac": 64, **wrap}},
        "wraps_s8": {"taps": SKEW, "output": {"bits": 8, "signed": True, **wrap}},
        "wraps_u12": {"taps": SKEW, "output": {"bits": 12, **wrap, "pedestal": 100}},
        "wraps_u8": {"taps": BLUR, "output": wrap},
        "wraps_s16": {"taps": [[300, -999]], "output": {**SUMS, **wrap}},
        "wraps_s32": {
            "taps": [[10**6, -(10**6)]],
            "input": {"bits": 16},
            "output": {**WIDE, **wrap},
        },
        "wraps_u32": {
            "taps": [[10**6, -(10**6)]],
            "input": {"bits": 16},
            "output": {"bits": 32, **wrap},
        },
        "forbids": {
            "taps": BLUR,
            "kernel": {"divisor": (16,)},
            "output": {"overflow": Overflow.FORBID},
            "input": {"bits": 10},
        },
    }


def registers() -> dict[str, Tables]:
    """Accumulators that wrap, saturate or start at the rounding constant."""
    wrap, clamp = {"overflow": Overflow.WRAP}, {"overflow": Overflow.SATURATE}
    skew = {"taps": SKEW, "output": SUMS}
    preloaded = {"preload": PRELOADED.preload}
    shifted = {"taps": SKEW, "input": {"frac": 4}, "output": {**SUMS, "frac": 0}}
    return {
        "wrap_s9": {**skew, "accumulator": {"bits": 9, **wrap}},
        "wrap_s2": {**skew, "accumulator": {"bits": 2, **wrap}},
        "wrap_u10": {**skew, "accumulator": {"bits": 10, "signed": False, **wrap}},
        "wrap_u16": {**skew, "accumulator": {"bits": 16, "signed": False, **wrap}},
        "wrap_u64": {
            **skew,
            "input": {"frac": 50},
            "output": {**WIDE, "frac": 0, "rounding": Rounding.TOWARD_NEGATIVE},
            "accumulator": {"bits": 64, "signed": False, **wrap},
        },
        "wrap_u40": {**skew, "accumulator": {"bits": 40, "signed": False, **wrap}},
        "wrap_spare": {**skew, "accumulator": {"bits": 30, **wrap}},
        "wrap_wide": {
            "taps": [[2**31 - 1, 2**31 - 2], [12345, 1]],
            "coefficient": {"bits": 32},
            "input": {"bits": 16},
            "output": WIDE,
            "accumulator": {"bits": 33, **wrap},
        },
        "clamp_s9": {**skew, "accumulator": {"bits": 9, **clamp}},
        "clamp_s12": {**skew, "accumulator": {"bits": 12, **clamp}},
        "clamp_u10": {**skew, "accumulator": {"bits": 10, "signed": False, **clamp}},
        "clamp_u64": {**skew, "accumulator": {"bits": 64, "signed": False, **clamp}},
        "clamp_spare": {**skew, "accumulator": {"bits": 30, **clamp}},
        "clamp_wide": {
            "taps": [[2**31 - 1, -(2**31)], [-(2**31), 1]],
            "coefficient": {"bits": 32},
            "input": {"bits": 16},
            "output": WIDE,
            "accumulator": {"bits": 40, **clamp},
        },
        "clamp_u16_words": {
            "taps": [[3, -2]],
            "input": {"bits": 16},
            "output": SUMS,
            "accumulator": {"bits": 16, **clamp},
        },
        "start": {**shifted, "accumulator": preloaded},
        "start_wrap": {**shifted, "accumulator": {"bits": 8, **wrap, **preloaded}},
        "start_clamp": {**shifted, "accumulator": {"bits": 9, **clamp, **preloaded}},
        "start_beyond": {
            "taps": [[5, -7]],
            "input": {"frac": 12},
            "output": {**SUMS, "frac": 2},
            "accumulator": {"bits": 9, **clamp, **preloaded},
        },
        "start_beyond_wrap": {
            "taps": [[5, -7]],
            "input": {"frac": 12},
            "output": {**SUMS, "frac": 2},
            "accumulator": {"bits": 9, **wrap, **preloaded},
        },
    }


def _huge(policy: Overflow, bits: int, **register: bool) -> Tables:
    """A second pass whose sums pass 64 bits: 32-bit codes times 32-bit coefficients."""
    large = 2**31 - 1
    return {
        "column": [65535, 1],
        "row": [large, large, -large, large, 17],
        "kernel": {"divisor": (1, 1)},
        "coefficient": {"bits": 32, "frac": (0, 0)},
        "input": {"bits": 16},
        "intermediate": {"bits": 32, "signed": False},
        "accumulator": {"bits": bits, "overflow": policy, **register},
        # anything that is added to half a step would take more than 64 bits
        "output": {**WIDE, "frac": -31, "rounding": Rounding.TOWARD_NEGATIVE},
    }


def two_passes() -> dict[str, Tables]:
    """Both orders of two passes, with all that an intermediate brings."""
    pair = {
        "column": [1, 4, 6, 4, 1],
        "row": [-1, 5, 5, -1],
        "kernel": {"divisor": (16, 8)},
        "coefficient": {"frac": (4, 3)},
    }
    middle = {"bits": 8, "signed": False, "pedestal": 3}
    across = {**middle, "first": First.HORIZONTAL}
    pixels = {"step": (2, 3), "phase": (1, 2), "channels": 3}
    cases: dict[str, Tables] = {}
    for name, between in (("down", middle), ("across", across)):
        two = {**pair, "intermediate": between}
        cases[name] = two
        cases[f"{name}_pixels"] = {**two, "image": pixels, "border": MIRROR}
        cases[f"{name}_full"] = {**two, "image": {"extent": Extent.FULL}, "border": REPLICATE}
        cases[f"{name}_valid"] = {**two, "image": {"extent": Extent.VALID, "step": (2, 2)}}
        cases[f"{name}_wraps"] = {
            **two,
            "intermediate": {**between, "overflow": Overflow.WRAP},
            "input": {"bits": 12, "pedestal": 64, "frac": 2},
            "output": {"bits": 16, "signed": True},
        }
        cases[f"{name}_site"] = {
            **two,
            "border": {**REPLICATE, "grid": Grid.SITE},
            "image": {"spacing": (2, 2)},
        }
        cases[f"{name}_rejects"] = {
            **two,
            "input": {"outside": Outside.REJECT, "range": (2, 200)},
        }
        cases[f"{name}_16"] = {
            **two,
            "input": {"bits": 12, "outside": Outside.CLAMP},
            "intermediate": {**between, "bits": 16, "pedestal": 0, "frac": 3},
            "output": {"bits": 12},
        }
        cases[f"{name}_32"] = {
            **two,
            "intermediate": {**between, "bits": 32, "signed": True, "pedestal": -(2**31)},
        }
        cases[f"{name}_one_row"] = {**two, "column": [3], "border": MIRROR}
        cases[f"{name}_one_column"] = {**two, "row": [3]}
        cases[f"{name}_far"] = {**two, "kernel": {"divisor": (16, 8), "origin": (30, -30)}}
        cases[f"{name}registers"] = {
            **two,
            "intermediate": {
                **between,
                "accumulator": spec(
                    taps=[[1]], accumulator={"bits": 9, "overflow": Overflow.SATURATE}
                ).accumulator,
            },
            "accumulator": {"bits": 9, "overflow": Overflow.WRAP},
        }
        none_first = {"column": [0, 0]} if name == "down" else {"row": [0, 0]}
        none_second = {"row": [0, 0]} if name == "down" else {"column": [0, 0]}
        cases[f"{name}_no_first"] = {**two, **none_first}
        cases[f"{name}_no_second"] = {**two, **none_second}
    return cases | {
        "modular_64": _huge(Overflow.WRAP, 64),
        "modular_u64": _huge(Overflow.WRAP, 63, signed=False),
        "modular_40": _huge(Overflow.WRAP, 40),
        "guarded_64": _huge(Overflow.SATURATE, 64),
        "guarded_63": _huge(Overflow.SATURATE, 63),
    }
