"""Pixel formats with nothing left open, and what does not fit them."""

from dataclasses import dataclass

from guardbit.fit.nearest import register
from guardbit.fit.places import place
from guardbit.model.enums import Container
from guardbit.model.filter import PixelFormat
from guardbit.model.finding import Finding, finding
from guardbit.model.spec import Auto, Spec

# Smallest first: the default container is the first that holds the format.
_CONTAINERS = {
    Container.U8: (8, False),
    Container.I8: (8, True),
    Container.U16: (16, False),
    Container.I16: (16, True),
    Container.U32: (32, False),
    Container.I32: (32, True),
}


@dataclass(frozen=True)
class _Wanted:
    """A table's keys, with the defaults that come from other tables filled in."""

    table: str
    bits: int
    signed: bool
    frac: int
    pedestal: int
    range: tuple[int, int] | None
    container: Container | None


def formats(spec: Spec) -> tuple[dict[str, PixelFormat], tuple[Finding, ...]]:
    """Return the formats of the tables "input", "intermediate" (if there is one) and
    "output", and findings on those that contradict themselves.

    The output's bits, signed and frac and the intermediate's frac default to the input's; a
    range defaults to all codes of the format, a container to the smallest that holds them.
    """
    wanted = _wanted(spec)
    found = tuple(item for each in wanted for item in _misfits(spec, each))
    return {each.table: _format(each) for each in wanted}, found


def border_value(spec: Spec) -> tuple[int, tuple[Finding, ...]]:
    """Return the code that reads outside the image return, and a finding if it is none.

    It may lie outside the input range, but not outside the input format.
    """
    value = spec.input.pedestal if spec.border.value is None else spec.border.value
    codes = register(spec.input.bits, spec.input.signed)
    if spec.border.value is None or codes[0] <= value <= codes[1]:
        return value, ()
    misfit = _outside(spec, "border-value-no-code", "border.value", value, codes)
    return value, (misfit,)


def _wanted(spec: Spec) -> tuple[_Wanted, ...]:
    source, mid, out = spec.input, spec.intermediate, spec.output
    given = _Wanted(
        "input",
        source.bits,
        source.signed,
        source.frac,
        source.pedestal,
        source.range,
        source.container,
    )
    result = _Wanted(
        "output",
        source.bits if out.bits is None else out.bits,
        source.signed if out.signed is None else out.signed,
        source.frac if out.frac is None else out.frac,
        out.pedestal,
        out.range,
        out.container,
    )
    if mid is None:
        return given, result
    # what a search has to find is refused before
    assert not isinstance(mid.bits, Auto) and not isinstance(mid.frac, Auto)
    frac = source.frac if mid.frac is None else mid.frac
    between = _Wanted("intermediate", mid.bits, mid.signed, frac, mid.pedestal, None, None)
    return given, between, result


def _format(wanted: _Wanted) -> PixelFormat:
    low, high = wanted.range or register(wanted.bits, wanted.signed)
    return PixelFormat(
        bits=wanted.bits,
        signed=wanted.signed,
        frac=wanted.frac,
        pedestal=wanted.pedestal,
        low=low,
        high=high,
        container=wanted.container or _smallest(wanted.bits, wanted.signed),
    )


def _smallest(bits: int, signed: bool) -> Container:
    return next(each for each in _CONTAINERS if _holds(each, bits, signed, same=True))


def _holds(container: Container, bits: int, signed: bool, same: bool = False) -> bool:
    """Return whether a container holds every code; `same`: and is signed as the format is."""
    size, has_sign = _CONTAINERS[container]
    if same and has_sign != signed:
        return False
    low, high = register(bits, signed)
    least, greatest = register(size, has_sign)
    return least <= low and high <= greatest


def _misfits(spec: Spec, wanted: _Wanted) -> list[Finding]:
    found = []
    codes = register(wanted.bits, wanted.signed)
    if not codes[0] <= wanted.pedestal <= codes[1]:
        key = f"{wanted.table}.pedestal"
        found.append(_outside(spec, "pedestal-no-code", key, wanted.pedestal, codes))
    if wanted.range is not None:
        found += _range_misfits(spec, wanted.range, f"{wanted.table}.range", codes)
    if wanted.container and not _holds(wanted.container, wanted.bits, wanted.signed):
        found.append(_container_misfit(spec, wanted, wanted.container))
    return found


def _range_misfits(
    spec: Spec, limits: tuple[int, int], key: str, codes: tuple[int, int]
) -> list[Finding]:
    low, high = limits
    if low > high:
        return [finding("range-reversed", place(spec, key), least=low, greatest=high)]
    wrong = [code for code in limits if not codes[0] <= code <= codes[1]]
    return [_outside(spec, "range-outside-format", key, code, codes) for code in wrong[:1]]


def _container_misfit(spec: Spec, wanted: _Wanted, container: Container) -> Finding:
    return finding(
        "container-too-small",
        place(spec, f"{wanted.table}.container"),
        container=container.value,
        bits=wanted.bits,
        sign="signed" if wanted.signed else "unsigned",
        smallest=_smallest(wanted.bits, wanted.signed).value,
    )


def _outside(spec: Spec, kind: str, key: str, code: int, codes: tuple[int, int]) -> Finding:
    table = key.split(".", maxsplit=1)[0]
    return finding(
        kind,
        place(spec, key),
        code=code,
        least=codes[0],
        greatest=codes[1],
        table="input" if table == "border" else table,
    )
