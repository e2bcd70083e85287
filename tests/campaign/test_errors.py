"""A short campaign of error bounds."""

import random

import pytest

import randomspecs
from campaign.errors import Tally, report, sample


def test_no_frame_breaks_its_bound(capsys: pytest.CaptureFixture[str]) -> None:
    tally = Tally()
    for number in range(40):
        rng = random.Random(f"short{number}")
        tally.counts["drawn"] += 1
        made = sample(rng, randomspecs.random_spec(rng, f"s{number}"))
        if made is not None:
            tally.samples.append(made)
    assert len(tally.samples) > 20
    assert not any(s.violations for s in tally.samples)
    assert all(s.tightness <= 1 for s in tally.samples)
    tight = [s.tightness for s in tally.samples if s.passes == 1 and not s.acts]
    assert min(tight) > 0.9
    report(tally, 1)
    assert "violations: 0" in capsys.readouterr().out
