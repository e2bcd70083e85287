"""What every rung works with."""

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

from guardbit.model.filter import Filter, loaded, raster, registers_of
from guardbit.model.routine import Codes, Harm, Outcome, Probe, Routine, Runner
from guardbit.model.sizing import Sizing, Witness
from guardbit.model.vectors import Vector
from guardbit.vectors.power import Power, measure_power
from guardbit.vectors.stimuli import Stimulus, answered, stimuli
from guardbit.vectors.witnesses import Attained, witnesses
from guardbit.verify.cases import Case, from_vectors
from guardbit.verify.loadings import extremes, legal_loadings

_SMALL = 4096
_SHARE = 3


@dataclass(frozen=True, eq=False)
class Options:
    """`photograph` is (height, width) or (height, width, channels) of integers.

    `folder` receives a reproducer per mismatch; None: none are kept. `seconds` is the
    processor time after which a call on a small frame counts as a hang. `defects` is how many
    faults are seeded in the C at most; None: none, and there is no such rung.
    """

    photograph: Codes | None = None
    folder: Path | None = None
    seconds: float = 2.0
    defects: int | None = None


@dataclass(frozen=True, eq=False)
class Load:
    """Frames for the filter that has these taps in its coefficient registers.

    `taps` are in the order of the kernel's terms; `extremes` set every pixel that the taps of
    some output read to an end of the range.
    """

    taps: tuple[int, ...]
    filter: Filter
    frames: tuple[Vector, ...]
    extremes: tuple[Vector, ...]

    @property
    def cells(self) -> tuple[int, ...]:
        """Return the taps as a routine takes them: all cells of the box."""
        registers = registers_of(self.filter)
        return raster(registers, self.taps) if registers else self.taps


@dataclass(frozen=True, eq=False)
class Bench:
    """One filter and one routine under test, with the frames that are run on it.

    `frames` and the others are for the nominal kernel, `loads` for others that may be loaded.
    """

    sizing: Sizing
    routine: Routine
    probes: tuple[Probe, ...]
    options: Options
    power: Power
    probing: tuple[Vector, ...]
    attained: tuple[Attained, ...]
    witnessing: tuple[Vector, ...]
    frames: tuple[Vector, ...]
    loads: tuple[Load, ...] = ()

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
    frames = answered(f, stimuli(f, options.photograph))
    return Bench(
        sizing,
        routine,
        probes,
        options,
        power,
        answered(f, power.stimuli),
        attained,
        tuple(_witness(f, a.witness, a.stimulus) for a in attained if a.stimulus is not None),
        frames,
        tuple(_load(f, taps, frames) for taps in legal_loadings(f)),
    )


def _witness(f: Filter, witness: Witness, stimulus: Stimulus) -> Vector:
    """Return a witness frame with the response to it, for the taps that it is for."""
    (vector,) = answered(f if witness.taps is None else loaded(f, witness.taps), (stimulus,))
    return vector


def _load(f: Filter, taps: tuple[int, ...], frames: Sequence[Vector]) -> Load:
    """Return a few of the frames, and some of their own, for other taps."""
    other = loaded(f, taps)
    small = [v for v in frames if v.frame.size <= _SMALL] or [*frames[:1]]
    # every third is enough to see all sizes over a few loadings
    picked = small[sum(taps) % _SHARE :: _SHARE] or small[:1]
    chosen = (Stimulus(v.name, v.purpose, v.frame) for v in picked)
    return Load(taps, other, answered(other, chosen), answered(other, extremes(other)))


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


def with_loads(
    bench: Bench, nominal: Sequence[Vector], others: Sequence[Sequence[Vector]]
) -> list[Case]:
    """Return a case per frame of the nominal kernel, then per frame of each of the loads."""
    cases = from_vectors(nominal)
    for number, (load, vectors) in enumerate(zip(bench.loads, others, strict=True), 1):
        made = from_vectors(vectors, load.cells)
        cases += [replace(case, name=f"{case.name}-taps-{number}") for case in made]
    return cases
