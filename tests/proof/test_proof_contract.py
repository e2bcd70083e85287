"""The proof's own statement of the contract: the oracle's on numbers, and C of random specs."""

import random
from pathlib import Path

import oracle
import packaged
import randomspecs
from guardbit.model.filter import Filter
from guardbit.model.finding import SpecError
from guardbit.model.proof import DATA_MODELS, Verdict
from guardbit.proof.algebra.space import Space
from guardbit.proof.contract.expected import Expected
from guardbit.proof.coverage import cases
from guardbit.proof.prove import prove_case

SPECS = 40
MOST_TAPS = 40_000


def test_random_specs() -> None:
    """No C that the package emits is refuted; most of it is proved, all of it agrees on numbers."""
    rng = random.Random(4242)
    verdicts = []
    frames = 0
    for number in range(SPECS):
        name = f"proof{number}"
        text = randomspecs.random_spec(rng, name)
        try:
            contract = oracle.load(text)
            made = packaged.made(text, Path(), name)
        except (oracle.ContradictionError, SpecError):
            continue
        f, routine = made.sizing.filter, made.emission.routine
        frames += sum(agrees(f, contract, image) for image in some(rng, contract))
        chosen = cases(f, routine, (rng.choice(DATA_MODELS),), thorough=False)
        for case in rng.sample(chosen, min(4, len(chosen))):
            found = prove_case(f, routine, case, strict=True)
            assert found.verdict not in (Verdict.REFUTED, Verdict.BROKEN), (text, found)
            verdicts.append(found.verdict)
    assert frames > 40
    assert verdicts.count(Verdict.PROVED) > 0.8 * len(verdicts)


def some(rng: random.Random, contract: oracle.Contract) -> list[oracle.Image]:
    return [image for image, _ in zip(randomspecs.frames(rng, contract), range(2), strict=False)]


def agrees(f: Filter, contract: oracle.Contract, image: oracle.Image) -> bool:
    """Whether there was an output to compare; it has to be the oracle's."""
    if oracle.rejects(contract, image):
        return False
    expected = Expected(f, Space(), len(image), len(image[0]), lambda y, x, c: image[y][x][c])
    rows, columns = expected.shape
    if rows * columns * sum(len(p.kernel.terms) for p in f.passes) > MOST_TAPS:
        return False
    channels = range(f.geometry.channels)
    got = [[[expected.at(y, x, c) for c in channels] for x in range(columns)] for y in range(rows)]
    if rows and columns:
        assert got == oracle.run(contract, image)[0]
    return bool(rows and columns)
