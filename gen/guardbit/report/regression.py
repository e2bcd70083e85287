"""A counterexample as files: the frame, and a test that fails as long as it is one."""

from collections.abc import Sequence
from pprint import pformat

from guardbit.model.filter import Filter
from guardbit.model.proof import CaseResult

_TEST = '''"""A frame on which the C of {name} went wrong: {reason}, {size} on {model}."""

from guardbit.cli import api

SPEC = {spec!r}
AGAINST = {against!r}
TAPS = {taps!r}
FRAME = {frame}


def test_{name}_{slug}() -> None:
    """The compiled C gives what the contract says. Run it from where SPEC can be found."""
    assert api.filtered(SPEC, FRAME, AGAINST, TAPS) == api.expected(SPEC, FRAME, TAPS)
'''


def regression_files(
    spec: str,
    f: Filter,
    wrong: CaseResult,
    against: tuple[str, str, Sequence[str]] | None,
) -> dict[str, bytes]:
    """Return a pytest file that holds the frame of a refuted case, by name."""
    example = wrong.counterexample
    assert example is not None
    frame = [[list(pixel) for pixel in row] for row in example.frame]
    given = None if against is None else (against[0], against[1], tuple(against[2]))
    slug = wrong.reason.replace("-", "_")
    text = _TEST.format(
        name=f.name,
        reason=wrong.reason,
        size=f"{wrong.case.height} rows by {wrong.case.width} columns",
        model=wrong.case.model.name,
        spec=spec,
        against=given,
        taps=None if example.taps is None else tuple(example.taps),
        frame=pformat(frame, width=96, compact=True),
        slug=slug,
    )
    return {f"test_{f.name}_{slug}.py": text.encode("utf-8")}
