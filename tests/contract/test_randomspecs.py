"""The generator of random specs reaches every word of the spec file, and mostly makes sense."""

import random
import tomllib
from collections import Counter

import pytest

import oracle
import randomspecs
from oracle_reading import DEFAULTS, WORDS

SPECS = 400
LEFT_OUT = {"file", "taps", "summary"}


@pytest.fixture(scope="module")
def specs() -> list[str]:
    return [randomspecs.random_spec(random.Random(seed), f"f{seed}") for seed in range(SPECS)]


def test_same_seed_same_spec() -> None:
    once, twice = (randomspecs.random_spec(random.Random(7), "again") for _ in range(2))
    assert once == twice


def test_every_key_and_word_occurs(specs: list[str]) -> None:
    seen = {
        (table, key)
        for spec in specs
        for table, keys in tomllib.loads(spec).items()
        for key in keys
    }
    wanted = {(table, key) for table, keys in DEFAULTS.items() for key in keys}
    assert {key for _, key in wanted - seen} <= LEFT_OUT
    text = "\n".join(specs)
    for words in WORDS.values():
        for word in words:
            assert f'"{word}"' in text or word in ("nearest", "binary", "pixel", "zero"), word


def test_few_specs_contradict_themselves(specs: list[str]) -> None:
    contradictory = sum(not randomspecs.is_sound(spec) for spec in specs)
    assert 0 < contradictory < SPECS // 10


def test_frames_are_legal_and_show_something(specs: list[str]) -> None:
    count: Counter[str] = Counter()
    for seed, spec in enumerate(specs[:150]):
        if not randomspecs.is_sound(spec):
            continue
        contract = oracle.load(spec)
        image = randomspecs.random_frame(random.Random(seed), contract)
        codes = [code for row in image for pixel in row for code in pixel]
        assert contract.container[0] <= min(codes) <= max(codes) <= contract.container[1]
        if contract.outside == "undefined":
            assert contract.source.low <= min(codes) <= max(codes) <= contract.source.high
        if oracle.rejects(contract, image):
            count["rejected"] += 1
            continue
        try:
            output, _ = oracle.run(contract, image)
        except oracle.UnsafeError:
            count["unsafe"] += 1
            continue
        target = contract.stages[-1].target
        for row in output:
            for pixel in row:
                count.update(
                    "inside" if target.low < c < target.high else "at an end" for c in pixel
                )
    assert count["rejected"] > 0
    assert count["inside"] > count["at an end"]
