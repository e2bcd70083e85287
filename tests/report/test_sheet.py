"""The sizing sheet as text and as Markdown."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.canonical import dumps
from guardbit.model.sheet import Sheet
from guardbit.report.cautions import CAUTIONS
from guardbit.report.look import Look
from guardbit.report.sheet import blocks, sheet_markdown, sheet_text
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec
from guardbit.study.sheet import sheet

Snapshot = Callable[[str, str], None]

SPEC = """
[filter]
name = "edge"
summary = "one | two `three`"
[kernel]
column = [1, 2.2, 1]
row = [-1, 0, 1]
divisor = [4, 1]
[coefficient]
bits = 5
frac = [4, 0]
[input]
bits = 8
[intermediate]
bits = 8
signed = false
[accumulator]
overflow = "wrap"
bits = 8
[output]
bits = 9
signed = true
[border]
mode = "replicate"
"""


@pytest.fixture(scope="module")
def made() -> Sheet:
    ramp = np.arange(48 * 40).reshape(48, 40, 1) * 7 % 256
    return sheet(analyse(resolve(parse_spec(SPEC, "edge.toml", Path()))), {"ramp.pgm": ramp})


def test_text_of_a_sheet(made: Sheet, snapshot: Snapshot) -> None:
    snapshot("sheet_pipe.txt", sheet_text(Look(), made))


def test_markdown_of_a_sheet(made: Sheet, snapshot: Snapshot) -> None:
    snapshot("sheet.md", sheet_markdown(made))


def test_every_row_of_a_markdown_table_has_the_cells_of_its_title(made: Sheet) -> None:
    lines = [line for line in sheet_markdown(made).splitlines() if line.startswith("|")]
    assert len(lines) == sum(len(block.rows) + 2 for block in blocks(made))
    for block in blocks(made):
        assert {len(row) for row in block.rows} == {1 + len(block.columns)}, block.title


def test_what_the_user_wrote_is_no_markup(made: Sheet) -> None:
    assert r"one \| two \`three\`" in sheet_markdown(made)


def test_both_carry_the_cautions_and_the_sheet_has_a_canonical_form(made: Sheet) -> None:
    joined = " ".join(sheet_text(Look(), made).split())
    assert all(caution in joined and caution in sheet_markdown(made) for caution in CAUTIONS)
    assert '"practice"' in dumps(made)


LOADED = """
[filter]
name = "loaded"
[kernel]
taps = [[1, 2, 1]]
divisor = 4
[coefficient]
bits = 4
frac = 2
registers = { sum = 4 }
[input]
bits = 8
"""


def test_sheet_of_a_filter_whose_taps_are_loaded(snapshot: Snapshot) -> None:
    """No tap order, no shared multiplier: what is loaded later may need each apart."""
    made = sheet(analyse(resolve(parse_spec(LOADED, "loaded.toml", Path()))), {})
    text = sheet_text(Look(), made)
    assert "best tap order" not in text
    snapshot("sheet_loaded.txt", text)
