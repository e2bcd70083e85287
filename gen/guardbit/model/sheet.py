"""Everything that a sizing sheet shows."""

from dataclasses import dataclass

from guardbit.model.cost import Cost
from guardbit.model.frequency import Frequency
from guardbit.model.practice import Measured, MeasuredRounding, Practice
from guardbit.model.sizing import Sizing, TapOrder


@dataclass(frozen=True)
class Sheet:
    """One page for a design review; the last four are of `photographs`, if there are any."""

    sizing: Sizing
    frequency: Frequency
    cost: Cost
    orders: tuple[TapOrder, ...]
    photographs: tuple[str, ...] = ()
    measured: Measured | None = None
    rounding: tuple[MeasuredRounding, ...] = ()
    practice: Practice | None = None
