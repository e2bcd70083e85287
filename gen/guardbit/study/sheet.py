"""The sizing sheet gathered: sizing, response, cost, and what photographs show."""

from collections.abc import Mapping

from guardbit.model.filter import Filter
from guardbit.model.routine import Codes
from guardbit.model.sheet import Sheet
from guardbit.model.sizing import Sizing
from guardbit.sizing.cost import cost
from guardbit.sizing.frequency import frequency
from guardbit.sizing.order import tap_orders
from guardbit.study.noise import measured
from guardbit.study.practice import practice
from guardbit.study.rounding import measured_rounding
from guardbit.vectors.stimuli import scaled_photograph


def sheet(sizing: Sizing, photographs: Mapping[str, Codes]) -> Sheet:
    """Return the sheet of a sizing.

    `photographs` are (rows, columns, channels) of codes, by name. One that is no legal frame of
    the filter is cut and scaled until it is, and its name says so.
    """
    f = sizing.filter
    frames, names = [], []
    for name, codes in photographs.items():
        fits = _is_legal(f, codes)
        frames.append(codes if fits else scaled_photograph(f, codes).frame)
        names.append(name if fits else f"{name} (scaled to the input's range)")
    return Sheet(
        sizing,
        frequency(f),
        cost(f),
        tap_orders(f),
        tuple(names),
        measured(f, frames) if frames else None,
        measured_rounding(f, frames),
        practice(sizing, frames) if frames else None,
    )


def _is_legal(f: Filter, codes: Codes) -> bool:
    height, width, channels = codes.shape
    sizes = zip((height, width), (f.geometry.rows, f.geometry.columns), strict=True)
    return (
        channels == f.geometry.channels
        and all(axis.sizes[0] <= size <= axis.sizes[1] for size, axis in sizes)
        and f.input.low <= codes.min()
        and codes.max() <= f.input.high
    )
