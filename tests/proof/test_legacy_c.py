"""Ten routines in the style of old firmware: five right, five with a classic bug each."""

from dataclasses import replace
from pathlib import Path

import pytest

from guardbit.cli import api
from guardbit.cli.main import status_of
from guardbit.model.proof import LP64, Case, CaseResult, Verdict
from guardbit.model.routine import SourceFile
from guardbit.proof.coverage import cases
from guardbit.proof.prove import prove_case

FOLDER = Path(__file__).parent / "legacy"
PACKED = "src,dst,width,height"
STRIDES = "src,src_stride,dst,dst_stride,width,height"
RIGHT = {
    "soften_walk": ("soften", PACKED),
    "edge_table": ("edge", STRIDES),
    "sharpen_struct": ("sharpen", STRIDES),
    "blur_rows": ("blur", PACKED),
    "relief_switch": ("relief", "dst,src,width,height"),
}
WRONG = {
    "defocus_flip": ("defocus", PACKED),
    "mirror_border": ("lowpass", PACKED),
    "narrow_sum": ("crisp", PACKED),
    "negative_half": ("second", PACKED),
    "width_stride": ("mean3", STRIDES),
}


def against(name: str) -> tuple[str, str, list[str]]:
    function, arguments = {**RIGHT, **WRONG}[name]
    return str(FOLDER / f"{name}.c"), function, arguments.split(",")


def spec(name: str) -> str:
    return str(FOLDER / f"{name}.toml")


def judged(name: str) -> list[CaseResult]:
    """The results of the host's cases, up to the first that refutes."""
    sizing, routine = api.subject(spec(name), against(name))
    found = []
    for case in cases(sizing.filter, routine, (LP64,), thorough=False):
        found.append(prove_case(sizing.filter, routine, case, strict=False))
        if found[-1].verdict in (Verdict.REFUTED, Verdict.BROKEN):
            break
    return found


@pytest.mark.parametrize("name", RIGHT)
def test_right_code_is_proved(name: str) -> None:
    open_ = [r for r in judged(name) if r.verdict is not Verdict.PROVED]
    assert open_ == []


@pytest.mark.parametrize("name", WRONG)
def test_wrong_code_is_refuted_by_a_frame_that_compiled_code_shows(name: str) -> None:
    last = judged(name)[-1]
    assert last.verdict in (Verdict.REFUTED, Verdict.BROKEN), last
    example = last.counterexample
    assert example is not None
    frame = [[list(pixel) for pixel in row] for row in example.frame]
    if last.case.src_gap or last.case.dst_gap:
        # compiled code without gaps between rows cannot show what needs them
        assert name == "width_stride"
        return
    assert api.filtered(spec(name), frame, against(name)) != api.expected(spec(name), frame)


def test_an_overflow_of_narrow_sums_needs_pixels_at_their_ends() -> None:
    """The frame is one that random frames of 8 bits hardly hold."""
    last = judged("narrow_sum")[-1]
    assert last.counterexample is not None
    codes = sorted(c for row in last.counterexample.frame for pixel in row for c in pixel)
    assert codes[-1] > 230


def test_what_is_right_is_right_in_strict_mode_where_it_relies_on_nothing() -> None:
    sizing, routine = api.subject(spec("blur_rows"), against("blur_rows"))
    assert (
        prove_case(sizing.filter, routine, Case(LP64, 5, 5), strict=True).verdict is Verdict.PROVED
    )
    sizing, routine = api.subject(spec("sharpen_struct"), against("sharpen_struct"))
    found = prove_case(sizing.filter, routine, Case(LP64, 3, 3), strict=True)
    assert (found.verdict, found.reason) == (Verdict.BROKEN, "arithmetic-shift")
    relaxed = prove_case(sizing.filter, routine, Case(LP64, 3, 3), strict=False)
    assert [a.reliance for a in relaxed.assumptions] == ["arithmetic-shift"]


def test_a_routine_of_other_argument_types_is_refused() -> None:
    sizing, routine = api.subject(spec("soften_walk"), against("soften_walk"))
    text = routine.sources[0].text.replace("typedef unsigned char pixel", "typedef short pixel")
    changed = replace(routine, sources=(SourceFile("soften_walk.c", text),))
    found = prove_case(sizing.filter, changed, Case(LP64, 3, 3), strict=False)
    assert found.verdict is Verdict.REFUSED


def call(command: str, name: str, *options: str) -> int:
    file, function, arguments = against(name)
    own = ["--against", file, "--function", function, "--arguments", ",".join(arguments)]
    return status_of([command, spec(name), *own, *options])


def test_the_command_verify_takes_the_users_own_c(capsys: pytest.CaptureFixture[str]) -> None:
    assert call("verify", "edge_table") == 0, capsys.readouterr()
    assert "holds    proof" in capsys.readouterr().out
    assert call("verify", "width_stride") == 1
    assert "FAILS" in capsys.readouterr().out


def test_the_command_prove_writes_a_test(
    capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    made = tmp_path / "out"
    assert call("prove", "narrow_sum", "--model", "LP64", "-o", str(made)) == 1
    said = capsys.readouterr()
    assert "REFUTED" in said.out and "narrow_sum.c" in said.err
    (test,) = made.glob("test_*.py")
    namespace: dict[str, object] = {}
    exec(compile(test.read_text(), str(test), "exec"), namespace)
    (function,) = [v for k, v in namespace.items() if k.startswith("test_") and callable(v)]
    with pytest.raises(AssertionError):
        function()


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (["--against", "nowhere.c", "--function", "f", "--arguments", PACKED], "nowhere.c"),
        (["--against", "nowhere.c"], "belong together"),
        (["--against", "x.c", "--function", "f", "--arguments", "src,dst,wide"], "wide"),
        (["--against", "x.c", "--function", "f", "--arguments", "src,width"], "src,width"),
    ],
)
def test_a_wrong_call_says_what_is_wrong(
    options: list[str], said: str, capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    (tmp_path / "x.c").write_text("void f(void) { }\n")
    options = [str(tmp_path / o) if o == "x.c" else o for o in options]
    assert status_of(["prove", spec("soften_walk"), *options]) == 2
    assert said in capsys.readouterr().err
