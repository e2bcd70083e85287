"""One choice of words resolved, analysed and held against the goal."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace
from decimal import Context, Decimal
from fractions import Fraction
from pathlib import Path

from guardbit.files.images import read_image
from guardbit.files.paths import safe_path
from guardbit.fit.resolve import resolve
from guardbit.model.filter import Filter
from guardbit.model.finding import Place, SpecError, finding
from guardbit.model.goal import Figures, Shortfall, Words
from guardbit.model.routine import Codes
from guardbit.model.sizing import ErrorBound, Sizing
from guardbit.model.spec import GoalTable, InputTable, Spec
from guardbit.sizing.analyse import analyse, unmet
from guardbit.sizing.frequency import frequency
from guardbit.study.goals.choices import with_words

_DIGITS = Context(prec=50)

Power = Callable[[Filter, Sequence[Codes]], Fraction | None]


def greatest_error(error: ErrorBound) -> Fraction:
    """Return the bound of |error| for every legal input, in LSB."""
    low, high = error.overall or (error.low, error.high)
    return max(abs(low), abs(high))


def goal_frames(spec: Spec) -> tuple[Codes, ...]:
    """Return the images that a goal names, each (rows, columns, channels).

    Raises SpecError for one that is no image or no legal frame of the spec: by its channels, size
    or codes; MachineError for one that cannot be read.
    """
    if spec.goal is None:
        return ()
    folder = Path(spec.path).parent
    return tuple(_frame(spec, folder, path) for path in spec.goal.frames)


def _frame(spec: Spec, folder: Path, path: str) -> Codes:
    codes = read_image(safe_path(folder, path))
    place = Place(spec.path, spec.lines.get("goal.frames"), "goal.frames")
    channels, sides = spec.image.channels, (spec.image.height, spec.image.width)
    if codes.shape[2] != channels:
        raise SpecError(
            finding("goal-frame-channels", place, path=path, got=codes.shape[2], wanted=channels)
        )
    height, width = size = codes.shape[:2]
    if any(not low <= n <= high for n, (low, high) in zip(size, sides, strict=True)):
        raise SpecError(finding("goal-frame-size", place, path=path, height=height, width=width))
    low, high = _legal_codes(spec.input)
    least, most = int(codes.min()), int(codes.max())
    if least < low or most > high:
        raise SpecError(
            finding(
                "goal-frame-codes", place, path=path, least=least, most=most, low=low, high=high
            )
        )
    return codes


def _legal_codes(table: InputTable) -> tuple[int, int]:
    """Return the range: of other codes the contract says nothing, nor would their error count."""
    if table.range is not None:
        return table.range
    count = 1 << table.bits
    return (-(count >> 1), (count >> 1) - 1) if table.signed else (0, count - 1)


@dataclass(frozen=True)
class Trial:
    """A choice of words with its sizing; `shortfalls` are the goals that it misses."""

    words: Words
    sizing: Sizing = field(repr=False)
    figures: Figures
    shortfalls: tuple[Shortfall, ...]

    @property
    def share(self) -> Fraction:
        """Return how far the goal is missed that is missed most; 0 if all are reached."""
        return max((each.share for each in self.shortfalls), default=Fraction(0))

    @property
    def missed(self) -> Shortfall | None:
        """Return the goal that is missed most."""
        return max(self.shortfalls, key=lambda each: each.share, default=None)


@dataclass(frozen=True)
class Judge:
    """A spec, its goal, and the frames of the goal."""

    spec: Spec
    goal: GoalTable
    frames: tuple[Codes, ...]
    snr: Power

    def trial(self, words: Words, beyond: Fraction | None = None) -> Trial | None:
        """Return a choice held against the goal; None if the contract refuses it.

        The frames are not run where a goal that needs none is missed by more than `beyond`
        (by anything, if that is None).
        """
        return self.of(with_words(self.spec, words), words, beyond)

    def of(self, made: Spec, words: Words, beyond: Fraction | None = None) -> Trial | None:
        """Return a spec of words that are settled held against the goal, as `trial` does."""
        try:
            sizing = analyse(resolve(made))
        except SpecError:
            return None
        if unmet(sizing):
            return None
        figures = self._figures(made, sizing)
        found = Trial(words, sizing, figures, tuple(_missed(self.goal, figures)))
        if self.goal.snr is None or found.share > (beyond or 0):
            return found
        ratio = self.snr(sizing.filter, self.frames)
        shortfalls = (*found.shortfalls, *_missed_snr(self.goal.snr, ratio))
        return replace(found, figures=replace(figures, snr=ratio), shortfalls=shortfalls)

    def shortfalls(self, spec: Spec, sizing: Sizing) -> tuple[Shortfall, ...]:
        """Return the goals that the sizing of a spec misses; of frames only if there are any."""
        found = _missed(self.goal, self._figures(spec, sizing))
        if self.goal.snr is not None and self.frames:
            found += _missed_snr(self.goal.snr, self.snr(sizing.filter, self.frames))
        return tuple(found)

    def _figures(self, made: Spec, sizing: Sizing) -> Figures:
        passes = sizing.filter.passes
        response = None
        if self.goal.response is not None:
            response = frequency(sizing.filter).deviation
        return Figures(
            accumulators=tuple(register.bits for register in sizing.registers),
            intermediate=passes[0].requantiser.to.bits if len(passes) == 2 else 0,
            coefficient=coefficient_bits(made, sizing),
            error=greatest_error(sizing.error),
            response=response,
            snr=None,
        )


def coefficient_bits(spec: Spec, sizing: Sizing) -> int:
    """Return the length of a coefficient: of the longest, where each vector has its own."""
    given = spec.coefficient.bits
    return given if isinstance(given, int) else max(p.kernel.bits for p in sizing.filter.passes)


def _missed(goal: GoalTable, figures: Figures) -> list[Shortfall]:
    """Return the goals that need no frames and are missed."""
    pairs = (("error", figures.error, goal.error), ("response", figures.response, goal.response))
    return [
        Shortfall(name, reached, wanted)
        for name, reached, wanted in pairs
        if wanted is not None and reached is not None and reached > wanted
    ]


def _missed_snr(decibels: Fraction, ratio: Fraction | None) -> list[Shortfall]:
    """Return the shortfall of a power ratio; none where there is no error at all."""
    wanted = power_ratio(decibels)
    return [] if ratio is None or ratio >= wanted else [Shortfall("snr", ratio, wanted)]


def power_ratio(decibels: Fraction) -> Fraction:
    """Return the power ratio of a number of decibels, to fifty digits."""
    tenth = _DIGITS.divide(Decimal(decibels.numerator), Decimal(10 * decibels.denominator))
    return Fraction(_DIGITS.power(Decimal(10), tenth))
