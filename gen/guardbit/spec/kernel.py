"""The ideal taps of a sheet, wherever they come from."""

from dataclasses import dataclass, replace
from pathlib import Path, PurePath

from guardbit.files.paths import safe_path
from guardbit.files.reading import IMAGE_LIMIT, read_bytes
from guardbit.model.finding import GuardbitError
from guardbit.spec.forms import BOX_LIMIT, TAP_LIMIT
from guardbit.spec.formulas import RECIPES, Direction, Formula, Parameters, evaluate
from guardbit.spec.ideal import Ideal
from guardbit.spec.names import line_faults
from guardbit.spec.sheet import Sheet
from guardbit.spec.values import shown

PARAMETERS = ("size", "sigma", "axis", "neighbours")

_SOURCES = ("kernel.taps", "kernel.column", "kernel.row", "kernel.file", "kernel.formula")


@dataclass(frozen=True)
class Source:
    """The ideal taps, what the file called them, and the bytes of a kernel file."""

    ideal: Ideal
    words: str
    content: bytes = b""


def read_kernel(sheet: Sheet, folder: Path) -> Source | None:
    """Return the kernel, or None after reporting why there is none."""
    given = [key for key in _SOURCES if key in sheet.given]
    _check_parameters(sheet)
    if not sheet.usable(*_SOURCES) or not _one_source(sheet, given):
        return None
    source = _source(sheet, folder, given[0])
    if source is not None and not _few_enough(sheet, source.ideal, given[0]):
        return None
    return source


def _one_source(sheet: Sheet, given: list[str]) -> bool:
    kinds = {"column and row" if key in _SOURCES[1:3] else _last(key) for key in given}
    if not kinds:
        sheet.report("kernel-missing", "kernel")
    elif len(kinds) > 1:
        sheet.report("kernel-twice", given[1], got=" and ".join(map(_last, given)))
    elif len(given) == 1 and given[0] in _SOURCES[1:3]:
        missing = "row" if given[0] == "kernel.column" else "column"
        sheet.report("kernel-half", given[0], got=_last(given[0]), missing=missing)
    else:
        return True
    return False


def _last(key: str) -> str:
    return key.rpartition(".")[2]


def _source(sheet: Sheet, folder: Path, key: str) -> Source | None:
    match key:
        case "kernel.taps":
            return Source(Ideal(taps=sheet.get(key, tuple)), "taps")
        case "kernel.file":
            return _from_file(sheet, folder, sheet.get(key, str))
        case "kernel.formula":
            return _from_formula(sheet, sheet.get(key, Formula))
    column, row = (sheet.get(f"kernel.{part}", tuple) for part in ("column", "row"))
    return Source(Ideal(column=column, row=row), "column and row")


def _few_enough(sheet: Sheet, ideal: Ideal, key: str) -> bool:
    """Report more non-zero taps than a pass may have."""
    # Each pass of two has at most as many taps as one vector.
    if ideal.separable and "intermediate" in sheet.given:
        return True
    if ideal.nonzero > TAP_LIMIT:
        sheet.report("kernel-many-taps", key, got=ideal.nonzero, limit=TAP_LIMIT)
    return ideal.nonzero <= TAP_LIMIT


def _from_file(sheet: Sheet, folder: Path, relative: str) -> Source | None:
    from guardbit.files.images import parse_kernel  # NumPy, which few specs need here

    if line_faults(relative):
        # Certificates and comments in C quote it.
        sheet.report("path-characters", "kernel.file", got=shown(relative))
        return None
    try:
        data = read_bytes(safe_path(folder, relative), IMAGE_LIMIT, relative)
        taps = parse_kernel(data, relative, BOX_LIMIT)
    except GuardbitError as error:
        place = sheet.place("kernel.file")
        sheet.findings.extend(replace(each, place=place) for each in error.findings)
        return None
    return Source(Ideal(taps=taps), f"file {PurePath(relative).as_posix()}", data)


def _check_parameters(sheet: Sheet) -> None:
    """Report parameters that the formula does not take, and those that it lacks."""
    if not sheet.usable("kernel.formula"):
        return
    formula = sheet.maybe("kernel.formula", Formula)
    needs = RECIPES[formula].needs if formula is not None else ()
    for name in PARAMETERS:
        key = f"kernel.{name}"
        if key in sheet.given and formula is None:
            sheet.report("parameter-alone", key, got=name)
        elif key in sheet.given and name not in needs:
            expected = " and ".join(needs)
            sheet.report("parameter-unused", key, got=name, formula=formula, expected=expected)
        elif name in needs and key not in sheet.given:
            sheet.reject("parameter-missing", key, got=name, formula=formula)


def _from_formula(sheet: Sheet, formula: Formula) -> Source | None:
    if not sheet.usable(*(f"kernel.{name}" for name in RECIPES[formula].needs)):
        return None
    given = Parameters(
        sheet.maybe("kernel.size", tuple),
        sheet.maybe("kernel.sigma", tuple),
        sheet.maybe("kernel.axis", Direction),
        sheet.maybe("kernel.neighbours", int),
    )
    if formula in (Formula.FIRST_DERIVATIVE, Formula.SECOND_DERIVATIVE):
        along = given.size[0 if given.axis is Direction.VERTICAL else 1] if given.size else 0
        odd = all(length % 2 == 1 for length in given.size or ())
        if along < 3 or not odd:
            sheet.report("derivative-size", "kernel.size", got=str(list(given.size or ())))
            return None
    return Source(evaluate(formula, given), f"formula {formula.value}")
