"""What every rung works with."""

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from guardbit.model.filter import Filter
from guardbit.model.routine import Codes, Harm, Outcome, Probe, Routine, Runner
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Vector
from guardbit.vectors.power import Power, measure_power
from guardbit.vectors.stimuli import answered, stimuli
from guardbit.vectors.witnesses import Attained, witnesses
from guardbit.verify.cases import Case


@dataclass(frozen=True, eq=False)
class Options:
    """`photograph` is (height, width) or (height, width, channels) of integers.

    `folder` receives a reproducer per mismatch; None: none are kept. `seconds` is the
    processor time after which a call on a small frame counts as a hang.
    """

    photograph: Codes | None = None
    folder: Path | None = None
    seconds: float = 2.0


@dataclass(frozen=True, eq=False)
class Bench:
    """One filter and one routine under test, with the frames that are run on it."""

    sizing: Sizing
    routine: Routine
    probes: tuple[Probe, ...]
    options: Options
    power: Power
    probing: tuple[Vector, ...]
    attained: tuple[Attained, ...]
    witnessing: tuple[Vector, ...]
    frames: tuple[Vector, ...]

    @property
    def filter(self) -> Filter:
        """Return the contract."""
        return self.sizing.filter

    @property
    def taps(self) -> int:
        """Return how many products an output takes."""
        return sum(len(which.kernel.terms) for which in self.filter.passes)


def prepare(sizing: Sizing, routine: Routine, probes: tuple[Probe, ...], options: Options) -> Bench:
    """Return the frames for a filter with their responses, and the routine to run on them."""
    f = sizing.filter
    power = measure_power(f)
    attained = witnesses(sizing)
    return Bench(
        sizing,
        routine,
        probes,
        options,
        power,
        answered(f, power.stimuli),
        attained,
        answered(f, (a.stimulus for a in attained if a.stimulus is not None)),
        answered(f, stimuli(f, options.photograph)),
    )


@dataclass(frozen=True, eq=False)
class Trials:
    """A rung's cases and what the routine did with each, on the runner named."""

    runner: str
    cases: Sequence[Case] = field(default=())
    outcomes: Sequence[Outcome] = field(default=())

    @property
    def made(self) -> int:
        """Return how many calls were made: all, unless too many ended the process."""
        return sum(outcome.harm is not Harm.NOT_RUN for outcome in self.outcomes)


def run(runner: Runner, cases: Sequence[Case]) -> Trials:
    """Return what the runner's routine did with the cases."""
    return Trials(runner.name, cases, runner.run([case.call for case in cases]))
