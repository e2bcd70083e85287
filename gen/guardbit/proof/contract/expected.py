"""What the contract says that each output code is."""

from collections.abc import Callable
from dataclasses import dataclass, field

from guardbit.model.enums import Outside
from guardbit.model.filter import Filter, Pass
from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import Value
from guardbit.proof.contract.geometry import outputs, pixel_read
from guardbit.proof.contract.rounding import clamped, requantised
from guardbit.proof.contract.sums import accumulated

Pixels = Callable[[int, int, int], Value]
"""The code of the pixel at row, column and channel."""


@dataclass
class Expected:
    """The outputs of a filter for a frame of `height` x `width` pixels.

    `stepped` chooses how wrapping is written: see `accumulated`.
    """

    filter: Filter
    space: Space
    height: int
    width: int
    pixels: Pixels
    stepped: bool = False
    _codes: dict[tuple[int, int, int], Value] = field(default_factory=dict)
    _middle: dict[tuple[int, int, int], Value] = field(default_factory=dict)

    @property
    def rows(self) -> range:
        """Return the positions of the output rows."""
        g = self.filter.geometry
        return outputs(g.rows, g.extent, self.height)

    @property
    def columns(self) -> range:
        """Return the positions of the output columns."""
        g = self.filter.geometry
        return outputs(g.columns, g.extent, self.width)

    @property
    def shape(self) -> tuple[int, int]:
        """Return the output's rows and columns."""
        return len(self.rows), len(self.columns)

    def at(self, row: int, column: int, channel: int) -> Value:
        """Return the code of output number `row`, `column`."""
        y, x = self.rows[row], self.columns[column]
        return self.code(len(self.filter.passes) - 1, y, x, channel)

    def code(self, stage: int, y: int, x: int, channel: int) -> Value:
        """Return what pass number `stage` makes at a position of the image's grid."""
        each = self.filter.passes[stage]
        return requantised(self.space, each, self.total(stage, y, x, channel))

    def total(self, stage: int, y: int, x: int, channel: int) -> Value:
        """Return what that pass's accumulator holds at the end there."""
        each = self.filter.passes[stage]
        return accumulated(
            self.space,
            each,
            (
                self.space.multiply(
                    self._signal(stage, each, y + t.dy, x + t.dx, channel), t.integer
                )
                for t in each.kernel.terms
                if t.integer
            ),
            stepped=self.stepped,
        )

    def _signal(self, stage: int, each: Pass, y: int, x: int, channel: int) -> Value:
        """Return what a pass multiplies there: a code less the pedestal of its format."""
        code = self._read(y, x, channel) if stage == 0 else self._mid(y, x, channel)
        return self.space.subtract(code, each.source.pedestal)

    def _mid(self, y: int, x: int, channel: int) -> Value:
        key = (y, x, channel)
        if key not in self._middle:
            self._middle[key] = self.code(0, y, x, channel)
        return self._middle[key]

    def _read(self, y: int, x: int, channel: int) -> Value:
        key = (y, x, channel)
        if key not in self._codes:
            self._codes[key] = self._pixel(y, x, channel)
        return self._codes[key]

    def _pixel(self, y: int, x: int, channel: int) -> Value:
        f = self.filter
        row = pixel_read(f.border, f.geometry.rows, y, self.height)
        column = pixel_read(f.border, f.geometry.columns, x, self.width)
        if row is None or column is None:
            return f.border.value
        code = self.pixels(row, column, channel)
        if f.outside is Outside.CLAMP:
            return clamped(self.space, code, f.input.low, f.input.high)
        return code

    def rows_read(self, first: int, stop: int) -> set[int]:
        """Return the source rows that output rows `first` to before `stop` read."""
        f = self.filter
        offsets = {0}
        for each in f.passes:
            # a pass without taps reads nothing, and so does what comes before it
            offsets = {a + b for a in offsets for b in {t.dy for t in each.kernel.live}}
        if not self.shape[1]:
            return set()
        found = {
            pixel_read(f.border, f.geometry.rows, self.rows[r] + dy, self.height)
            for r in range(first, stop)
            for dy in offsets
        }
        return {row for row in found if row is not None}
