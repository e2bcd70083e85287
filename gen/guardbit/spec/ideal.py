"""The ideal taps of a kernel before division: a matrix, or a column and a row."""

from dataclasses import dataclass
from fractions import Fraction

from guardbit.model.spec import Matrix, Vector


@dataclass(frozen=True)
class Ideal:
    """Exactly one of `taps` and the pair `column`, `row` is set; none of them is empty."""

    taps: Matrix | None = None
    column: Vector | None = None
    row: Vector | None = None

    @property
    def separable(self) -> bool:
        """Whether there are two vectors."""
        return self.taps is None

    @property
    def box(self) -> tuple[int, int]:
        """Rows and columns, zero taps included."""
        if self.taps is not None:
            return len(self.taps), len(self.taps[0])
        return len(self.column or ()), len(self.row or ())

    @property
    def nonzero(self) -> int:
        """How many taps of the whole kernel are not zero."""
        if self.taps is not None:
            return sum(1 for row in self.taps for tap in row if tap)
        down, across = (sum(1 for tap in part or () if tap) for part in (self.column, self.row))
        return down * across

    @property
    def sums(self) -> tuple[Fraction, Fraction]:
        """The sums of column and row; for a matrix its sum and 1."""
        if self.taps is not None:
            return sum((sum(row, Fraction(0)) for row in self.taps), Fraction(0)), Fraction(1)
        return sum(self.column or (), Fraction(0)), sum(self.row or (), Fraction(0))

    @property
    def broken(self) -> Fraction | None:
        """The first tap, of either vector if there are two, that is no integer."""
        rows = self.taps if self.taps is not None else (self.column or (), self.row or ())
        return next((tap for row in rows for tap in row if tap.denominator != 1), None)
