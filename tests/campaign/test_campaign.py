"""A little of what `make campaign` does at length."""

from hypothesis import given, settings
from hypothesis import strategies as st

from campaign.batches import batch
from tools import examples


@settings(max_examples=examples(4), deadline=None)
@given(st.integers(0, 2**32))
def test_random_specs_agree_four_ways(seed: int) -> None:
    tally = batch(seed, frames=5, specs=20)
    assert tally.mismatches == []
    assert tally.counts["frames"] > 0
    assert tally.counts["frames by SciPy"] > 0
