"""direct() on random small filters: the obligations hold, and say no more than what is true."""

import random
from pathlib import Path

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import randomspecs
from guardbit.arith.rounding import requantise
from guardbit.fit.resolve import resolve
from guardbit.model.enums import Overflow, Preload
from guardbit.model.finding import SpecError
from guardbit.model.plan import Tail
from guardbit.model.sizing import Sizing
from guardbit.plan.conformity import check
from guardbit.plan.direct import direct
from guardbit.plan.evaluate import evaluate
from guardbit.plan.replay import carry_out
from guardbit.sizing.analyse import analyse
from guardbit.sizing.unmet import unmet
from guardbit.spec.reader import parse_spec
from tools import examples


def drawn(seed: int) -> Sizing | None:
    """The sizing of a random spec; None if it is refused."""
    text = randomspecs.random_spec(random.Random(seed), "drawn")
    try:
        sizing = analyse(resolve(parse_spec(text, "drawn.toml", Path())))
    except SpecError:
        return None
    return None if unmet(sizing) else sizing


@settings(max_examples=examples(150), deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(st.integers(0, 2**32))
def test_direct_plans_of_random_filters(seed: int) -> None:
    sizing = drawn(seed)
    if sizing is None:
        return
    plan = direct(sizing)
    assert check(plan, sizing) == plan
    evaluation = evaluate(plan, sizing.filter)
    assert all(owed.holds for owed in evaluation.obligations)
    for step in plan.steps:
        stage = sizing.filter.passes[step.stage]
        preloaded = stage.accumulator.preload is Preload.ROUNDING
        r = stage.requantiser
        for acc in sample(step.value, random.Random(seed)):
            wanted = requantise(r, preloaded, acc) - step.value.remove
            if r.overflow is not Overflow.FORBID or r.to.low <= wanted <= r.to.high:
                assert carry_out(step.value, acc) == wanted


def sample(tail: Tail, rng: random.Random) -> list[int]:
    low, high = tail.argument.low, tail.argument.high
    near = [n for n in range(-40, 41) if low <= n <= high]
    return [low, high, *near, *(rng.randint(low, high) for _ in range(40))]


def test_most_random_specs_are_planned() -> None:
    """A guard of the test above: it is not refusals that it passes on."""
    assert sum(drawn(seed) is not None for seed in range(60)) > 40
