"""The option --seed-defects: its number, its usual one, and a spec taken for it."""

import click
import pytest

from guardbit.cli.main import verify
from guardbit.cli.ranges import DEFECTS, defects

OPTION = next(p for p in verify.params if p.name == "seed_defects")
CONTEXT = click.Context(verify)


@pytest.mark.parametrize(("text", "number"), [(None, None), (DEFECTS, 120), ("7", 7)])
def test_how_many(text: str | None, number: int | None) -> None:
    assert defects(CONTEXT, OPTION, text) == number


@pytest.mark.parametrize("text", ["soften5.toml", "0", "-3", "many", "123456"])
def test_what_is_no_number_of_faults(text: str) -> None:
    with pytest.raises(click.BadParameter, match="guardbit verify SPEC --seed-defects"):
        defects(CONTEXT, OPTION, text)


def test_without_a_number_it_is_the_usual_one() -> None:
    with verify.make_context("verify", ["one.toml", "--seed-defects"]) as context:
        assert context.params["seed_defects"] == 120
        assert context.params["specs"] == ("one.toml",)
