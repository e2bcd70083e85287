"""How a run can end other than by returning."""

from guardbit.model.proof import Place
from guardbit.proof.algebra.values import Value


class RefusedError(Exception):
    """A construct that the machine does not take; `reason` is a key of the report's wording."""

    def __init__(self, reason: str, place: Place, detail: str = "") -> None:
        super().__init__(f"{reason} {place} {detail}")
        self.reason = reason
        self.place = place
        self.detail = detail


class BrokenError(Exception):
    """A rule of C that some input breaks.

    That are inputs at which `mask` holds and `value`, if given, lies outside `inside`.
    """

    def __init__(
        self,
        reason: str,
        place: Place,
        mask: Value,
        value: Value | None = None,
        inside: tuple[int, int] | None = None,
    ) -> None:
        super().__init__(f"{reason} {place}")
        self.reason = reason
        self.place = place
        self.mask = mask
        self.value = value
        self.inside = inside


class BudgetError(Exception):
    """The run took more steps than allowed."""
