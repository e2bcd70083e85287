"""Cases of where pixels are read: borders, extents, kernels, inputs."""

from fit.specs import EXACT
from guardbit.model.enums import (
    Container,
    Extent,
    Grid,
    Operation,
    Outside,
    Rounding,
)

from .parts import BLUR, MIRROR, MODES, REPLICATE, SKEW, SUMS, WIDE, Tables, short


def borders() -> dict[str, Tables]:
    """Each border mode on each grid, near and far."""
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
    "no_rows_ever": {"taps": BLUR, "image": {**VALID, "height": (1, 2)}},
    "no_columns_ever": {
        "taps": BLUR,
        "image": {**VALID, "width": (1, 4), "step": (1, 3), "phase": (0, 2)},
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


def inputs() -> dict[str, Tables]:
    """Formats of source and output, containers, ranges."""
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
