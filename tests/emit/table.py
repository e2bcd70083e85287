"""One spec for everything that changes the emitted C, by name."""

from typing import Any

from fit.specs import EXACT, PRELOADED, spec
from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    First,
    Grid,
    Operation,
    Outside,
    Overflow,
    Rounding,
)
from guardbit.model.spec import Spec

Tables = dict[str, Any]

SKEW = [[1, -2, 3], [4, 5, -6]]
BLUR = [[1, 2, 1], [2, 4, 2], [1, 2, 1]]
WIDE: Tables = {"bits": 32, "signed": True}
SUMS: Tables = {"bits": 16, "signed": True}
MODES = tuple(BorderMode)
FOLDING = (BorderMode.HALF_SAMPLE, BorderMode.WHOLE_SAMPLE, BorderMode.PERIODIC)
REPLICATE: Tables = {"mode": BorderMode.REPLICATE}
MIRROR: Tables = {"mode": BorderMode.HALF_SAMPLE}


def short(word: str) -> str:
    """The name of an enum's value as part of a C identifier."""
    return word.replace("-", "_").replace("ties_to", "tt").replace("toward", "tw")


def _borders() -> dict[str, Tables]:
    cases: dict[str, Tables] = {}
    for mode in MODES:
        border = {"mode": mode}
        name = short(mode.value)
        cases[f"edge_{name}"] = {"taps": SKEW, "output": SUMS, "border": border}
        cases[f"site_{name}"] = {
            "taps": [[1, -2, 3], [4, 5, -6], [7, -8, 9]],
            "output": SUMS,
            "border": {**border, "grid": Grid.SITE},
            "image": {"spacing": (2, 3)},
        }
        cases[f"pix_{name}"] = {
            "taps": SKEW,
            "output": SUMS,
            "border": border,
            "image": {"spacing": (3, 2), "channels": 2},
        }
        cases[f"far_{name}"] = {
            "taps": SKEW,
            "kernel": {"origin": (-9, 23)},
            "output": SUMS,
            "border": border,
        }
        cases[f"near_{name}"] = {
            "taps": [[3, 1], [1, -1]],
            "kernel": {"origin": (1, 1)},
            "output": SUMS,
            "border": border,
        }
        cases[f"full_{name}"] = {
            "taps": SKEW,
            "output": SUMS,
            "border": border,
            "image": {"extent": Extent.FULL, "step": (1, 2), "channels": 3},
        }
    return cases


VALID: Tables = {"extent": Extent.VALID}
GEOMETRY: dict[str, Tables] = {
    "valid": {"taps": SKEW, "output": SUMS, "image": VALID},
    "valid_mapped": {
        "taps": SKEW,
        "output": SUMS,
        "border": REPLICATE,
        "image": {**VALID, "spacing": (2, 1), "step": (2, 3), "phase": (1, 2)},
    },
    "valid_far": {
        "taps": SKEW,
        "kernel": {"origin": (30, -30)},
        "output": SUMS,
        "border": MIRROR,
        "image": VALID,
    },
    "valid_edges": {"taps": [[0, 0, 0], [0, 1, 2], [0, 0, 0]], "image": VALID, "output": SUMS},
    "full": {"taps": SKEW, "output": SUMS, "image": {"extent": Extent.FULL}},
    "full_step": {
        "taps": SKEW,
        "output": SUMS,
        "border": MIRROR,
        "image": {"extent": Extent.FULL, "step": (3, 2), "phase": (2, 1)},
    },
    "full_site": {
        "taps": [[1, 2], [-3, 4]],
        "output": SUMS,
        "border": {**MIRROR, "grid": Grid.SITE},
        "image": {
            "extent": Extent.FULL,
            "spacing": (2, 2),
            "width": (2, 40),
            "height": (2, 40),
        },
    },
    "step": {"taps": BLUR, "output": SUMS, "image": {"step": (2, 3), "phase": (1, 2)}},
    "step_wide": {"taps": [[1, 2]], "output": SUMS, "image": {"step": (7, 5), "phase": (3, 0)}},
    "step_pixels": {
        "taps": BLUR,
        "output": SUMS,
        "border": REPLICATE,
        "image": {"step": (2, 2), "channels": 3},
    },
    "gaps": {"taps": [[1], [0], [0], [-1]], "output": SUMS, "border": MIRROR},
    "gap_columns": {"taps": [[5, 0, 0, 0, -3]], "output": SUMS, "border": MIRROR},
    "pixels_16": {"taps": BLUR, "output": SUMS, "image": {"channels": 16}},
    "correlation": {
        "taps": SKEW,
        "output": SUMS,
        "filter": {"operation": Operation.CORRELATION},
    },
    "one_size": {
        "taps": BLUR,
        "output": SUMS,
        "image": {"width": (5, 5), "height": (7, 7)},
    },
    "some_sizes": {
        "taps": BLUR,
        "output": SUMS,
        "border": REPLICATE,
        "image": {"width": (3, 9), "height": (2, 20)},
    },
    "always_far": {
        "taps": [[1]],
        "kernel": {"origin": (12, 12)},
        "image": {"width": (1, 9), "height": (1, 9)},
    },
    "small_far": {
        "taps": [[1, 3]],
        "kernel": {"origin": (12, -12)},
        "border": MIRROR,
        "image": {"width": (1, 9), "height": (1, 9)},
    },
}


KERNELS: dict[str, Tables] = {
    "one_tap": {"taps": [[1]]},
    "minus": {"taps": [[-3]], "output": SUMS},
    "row_9": {"taps": [[1, 8, 28, 56, 70, 56, 28, 8, 1]], "kernel": {"divisor": (256,)}},
    "column_9": {"taps": [[x] for x in (1, 8, 28, 56, 70, 56, 28, 8, 1)], "output": SUMS},
    "row_40": {"taps": [list(range(-20, 20))], "output": WIDE, "border": MIRROR},
    "column_40": {"taps": [[x] for x in range(-20, 20)], "output": WIDE, "border": REPLICATE},
    "box_17": {"taps": [[1] * 17] * 3, "output": SUMS},
    "nothing": {"taps": [[0]]},
    "nothing_wide": {"taps": [[0] * 3] * 3, "output": {**SUMS, "pedestal": -7}},
    "nothing_rejects": {
        "taps": [[0, 0]],
        "input": {"outside": Outside.REJECT, "range": (3, 9)},
        "border": MIRROR,
    },
    "nothing_steps": {"taps": [[0]], "image": {"step": (2, 2), "channels": 2}},
    "nothing_divided": {"taps": [[0]], "kernel": {"divisor": (5,)}, "coefficient": EXACT},
    "never_read": {
        "taps": [[1, 2]],
        "kernel": {"origin": (-2, 30)},
        "image": {"width": (1, 9)},
    },
    "never_read_rejects": {
        "taps": [[1, 2]],
        "kernel": {"origin": (2, 30)},
        "input": {"outside": Outside.REJECT, "range": (3, 9)},
        "border": {"value": 77},
        "image": {"width": (1, 9)},
    },
    "site_below_only": {
        "taps": [[1, 2]],
        "kernel": {"origin": (-4, -2)},
        "border": {**REPLICATE, "grid": Grid.SITE},
        "image": {"spacing": (2, 2)},
    },
    "site_below_large": {
        "taps": [[1, 2]],
        "kernel": {"origin": (-4, -2)},
        "border": {**REPLICATE, "grid": Grid.SITE},
        "image": {"spacing": (2, 2), "width": (2, 50), "height": (2, 50)},
    },
    "below_only": {
        "taps": [[1, 2]],
        "kernel": {"origin": (-4, 0)},
        "border": {"grid": Grid.SITE},
        "image": {"spacing": (2, 2)},
    },
    "A_name_of_24_characters_": {"taps": SKEW, "output": SUMS, "border": MIRROR},
}


def _inputs() -> dict[str, Tables]:
    cases: dict[str, Tables] = {}
    for bits in (1, 8, 12, 16):
        for signed in (False, True):
            kind = "s" if signed else "u"
            cases[f"in_{kind}{bits}"] = {
                "taps": SKEW,
                "input": {"bits": bits, "signed": signed},
                "output": WIDE,
            }
    for bits in (1, 8, 11, 16, 17, 24, 31, 32):
        for signed in (False, True):
            cases[f"out_{'s' if signed else 'u'}{bits}"] = {
                "taps": [[1000, -70000], [3, 5]],
                "input": {"bits": 16},
                "output": {"bits": bits, "signed": signed},
            }
    for outside in Outside:
        box = {"taps": BLUR, "output": SUMS}
        name = outside.value
        cases[f"{name}_video"] = {**box, "input": {"outside": outside, "range": (16, 235)}}
        cases[f"{name}_low"] = {**box, "input": {"outside": outside, "range": (3, 255)}}
        cases[f"{name}_10_in_16"] = {**box, "input": {"outside": outside, "bits": 10}}
        for container in (Container.U16, Container.I32, Container.U32):
            cases[f"{name}_8_in_{container.value}"] = {
                **box,
                "input": {"outside": outside, "container": container, "pedestal": 5},
                "border": MIRROR,
            }
        cases[f"{name}_positive"] = {
            **box,
            "input": {"outside": outside, "signed": True, "range": (0, 100)},
        }
        cases[f"{name}_gaps"] = {
            "taps": [[1], [0], [0], [2]],
            "output": SUMS,
            "input": {"outside": outside, "range": (16, 235)},
            "border": MIRROR,
        }
        cases[f"{name}_band"] = {
            "taps": [[1], [2]],
            "kernel": {"origin": (-2, 0)},
            "output": SUMS,
            "input": {"outside": outside, "range": (16, 235)},
            "image": {"channels": 2, "step": (3, 1)},
        }
    return cases


PEDESTALS: dict[str, Tables] = {
    "black_level": {
        "taps": BLUR,
        "kernel": {"divisor": (16,)},
        "input": {"bits": 12, "pedestal": 256},
        "output": {"bits": 12, "pedestal": 256},
        "border": REPLICATE,
    },
    "constant_value": {
        "taps": SKEW,
        "input": {"bits": 12, "pedestal": 64, "range": (60, 4000)},
        "border": {"value": 4095},
        "output": {**WIDE, "pedestal": -5},
    },
    "signed_pedestal": {
        "taps": SKEW,
        "input": {"bits": 16, "signed": True, "pedestal": -32768},
        "output": {**WIDE, "pedestal": 12345},
    },
    "group_ends": {
        "taps": [[-128, 1], [-1, 127]],
        "input": {"bits": 9, "range": (0, 256)},
        "output": WIDE,
    },
    "unit_pedestal": {
        "taps": [[1]],
        "input": {"frac": 30},
        "output": {"bits": 16, "frac": 0, "pedestal": 32767},
    },
    "unit_low_pedestal": {
        "taps": [[-1]],
        "input": {"frac": 8},
        "output": {**SUMS, "frac": 0, "pedestal": -32768, "rounding": Rounding.TIES_TO_AWAY},
    },
}


def _roundings() -> dict[str, Tables]:
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


def _shifts() -> dict[str, Tables]:
    wrap = {"overflow": Overflow.WRAP}
    return {
        "left": {"taps": SKEW, "output": {**WIDE, "frac": 3}},
        "left_far": {"taps": SKEW, "output": {**WIDE, "frac": 50}},
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


def _registers() -> dict[str, Tables]:
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


def _two_passes() -> dict[str, Tables]:
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
        cases[f"{name}_registers"] = {
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


def cases() -> dict[str, Spec]:
    """The specs by name; the name is the filter's as well."""
    tables = {
        **_borders(),
        **GEOMETRY,
        **KERNELS,
        **_inputs(),
        **PEDESTALS,
        **_roundings(),
        **_shifts(),
        **_registers(),
        **_two_passes(),
    }
    return {name: _named(name, table) for name, table in tables.items()}


def _named(name: str, tables: Tables) -> Spec:
    return spec(**{**tables, "filter": {**tables.get("filter", {}), "name": name}})
