"""Every construct that the machine accepts does what compiled code does, under the sanitizers."""

import random
import re
import subprocess
from functools import cache
from pathlib import Path

import pytest

from guardbit.build.compiler import find_compiler
from guardbit.model.proof import DATA_MODELS, IP16, LP64, DataModel
from guardbit.model.routine import SourceFile
from guardbit.proof.algebra.values import Form, Table
from guardbit.proof.c.program import Program
from guardbit.proof.machine.errors import BrokenError

SOURCE = (Path(__file__).parent / "constructs.c").read_text()
NAMES = re.findall(r"^int64_t f_(\w+)\(", SOURCE, re.MULTILINE)

PAIRS = [(a, b) for a in (-128, -1, 0, 1, 4, 5, 127) for b in (0, 1, 7, 255)]
_RNG = random.Random(1999)
PAIRS += [(_RNG.randint(-128, 127), _RNG.randint(0, 255)) for _ in range(40)]

BEYOND_16_BITS = ("split_word", "limits")
"""Functions whose sums do not fit an int of 16 bits: there the machine has to say so."""

_MAIN = """
#include <stdio.h>
int main(void)
{{
    static const int pairs[][2] = {{ {pairs} }};
    for (size_t i = 0; i < sizeof pairs / sizeof *pairs; i++) {{
        {calls}
    }}
    return 0;
}}
"""


@pytest.fixture(scope="module")
def compiled(tmp_path_factory: pytest.TempPathFactory) -> dict[str, list[int]]:
    """What compiled code gives for every function and pair; any sanitizer's word ends it."""
    folder = tmp_path_factory.mktemp("constructs")
    calls = "\n".join(
        f'printf("%lld ", (long long)f_{name}(pairs[i][0], pairs[i][1]));' for name in NAMES
    )
    pairs = ", ".join(f"{{ {a}, {b} }}" for a, b in PAIRS)
    file = folder / "constructs.c"
    file.write_text(SOURCE + _MAIN.format(pairs=pairs, calls=calls + "\nputchar(10);"))
    compiler = find_compiler()
    checks = f"-fsanitize={','.join(compiler.sanitizers)}"
    command = [*compiler.command, "-std=c99", "-w", checks, "-fno-sanitize-recover=all"]
    subprocess.run([*command, str(file), "-o", str(folder / "run")], check=True)
    done = subprocess.run([str(folder / "run")], capture_output=True, text=True, check=True)
    rows = [list(map(int, line.split())) for line in done.stdout.splitlines()]
    return {name: [row[i] for row in rows] for i, name in enumerate(NAMES)}


@cache
def program(model: DataModel) -> Program:
    return Program([SourceFile("constructs.c", SOURCE)], model, strict=False)


@pytest.mark.parametrize("name", NAMES)
def test_on_numbers(name: str, compiled: dict[str, list[int]]) -> None:
    made = program(LP64)
    made.begin()
    assert [made.call(f"f_{name}", pair) for pair in PAIRS] == compiled[name]


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("model", DATA_MODELS, ids=lambda m: m.name)
def test_on_symbols(name: str, model: DataModel, compiled: dict[str, list[int]]) -> None:
    """One run on open values is right at every pair, on data models that the host has not too."""
    made = program(model)
    space = made.begin().space
    a, b = space.pixel(-128, 127), space.pixel(0, 255)
    assert isinstance(a, Form) and isinstance(b, Form)
    if model is IP16 and name in BEYOND_16_BITS:
        with pytest.raises(BrokenError, match="signed-overflow"):
            made.call(f"f_{name}", [a, b])
        return
    found = made.call(f"f_{name}", [a, b])
    (p,), (q,) = a.terms, b.terms
    assert isinstance(found, int | Form | Table)
    got = [space.at(found, {p: x, q: y}) for x, y in PAIRS]
    assert got == compiled[name]
