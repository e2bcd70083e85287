"""Checks of the pixel formats, the border and the image, as far as a spec settles them."""

from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    Grid,
    Overflow,
    Preload,
    Rounding,
)
from guardbit.model.spec import Auto
from guardbit.spec.ideal import Ideal
from guardbit.spec.sheet import Sheet

_AXES = ("vertical", "horizontal")


def check_formats(sheet: Sheet) -> None:
    """Report codes, ranges and containers that do not go with their format."""
    _check_format(sheet, "input")
    _check_format(sheet, "output")
    if "intermediate" in sheet.given:
        _check_code(sheet, "intermediate", "intermediate.pedestal")
    if "border.value" in sheet.given:
        _check_code(sheet, "input", "border.value")
    _check_wrap(sheet)
    _check_preload(sheet, "accumulator", "output")
    if "intermediate" in sheet.given:
        _check_preload(sheet, "intermediate.accumulator", "intermediate")


def _check_wrap(sheet: Sheet) -> None:
    """Report a range where a result is taken modulo the whole format."""
    if "output.range" not in sheet.given or not sheet.usable("output.overflow"):
        return
    if sheet.get("output.overflow", Overflow) is Overflow.WRAP:
        sheet.report("wrap-with-range", "output.range")


def codes(sheet: Sheet, table: str) -> tuple[int, int] | None:
    """Return the least and greatest code of a table's format; None if it is not known.

    What [output] leaves out is the input's.
    """
    bits_key, signed_key = (_settled(sheet, table, part) for part in ("bits", "signed"))
    if not sheet.usable(bits_key, signed_key) or sheet.values[bits_key] is Auto.AUTO:
        return None
    bits, signed = sheet.get(bits_key, int), sheet.get(signed_key, bool)
    return (-(1 << bits - 1), (1 << bits - 1) - 1) if signed else (0, (1 << bits) - 1)


def _settled(sheet: Sheet, table: str, part: str) -> str:
    key = f"{table}.{part}"
    return f"input.{part}" if table == "output" and key not in sheet.given else key


def _words(sheet: Sheet, table: str) -> str:
    bits, signed = (_settled(sheet, table, part) for part in ("bits", "signed"))
    sign = "signed" if sheet.get(signed, bool) else "unsigned"
    return f"{sheet.get(bits, int)} bits {sign}"


def _check_format(sheet: Sheet, table: str) -> None:
    _check_code(sheet, table, f"{table}.pedestal")
    _check_range(sheet, table)
    _check_container(sheet, table)


def _check_code(sheet: Sheet, table: str, key: str) -> None:
    legal = codes(sheet, table)
    if legal is None or not sheet.usable(key):
        return
    code = sheet.get(key, int)
    if not legal[0] <= code <= legal[1]:
        low, high = legal
        sheet.report("not-a-code", key, got=code, low=low, high=high, format=_words(sheet, table))


def _check_range(sheet: Sheet, table: str) -> None:
    key = f"{table}.range"
    legal = codes(sheet, table)
    if legal is None or not sheet.usable(key) or key not in sheet.given:
        return
    low, high = sheet.get(key, tuple)
    if low < legal[0] or high > legal[1]:
        sheet.report(
            "range-outside-bits",
            key,
            got=f"[{low}, {high}]",
            low=legal[0],
            high=legal[1],
            format=_words(sheet, table),
        )


def _check_container(sheet: Sheet, table: str) -> None:
    key = f"{table}.container"
    legal = codes(sheet, table)
    if legal is None or not sheet.usable(key) or key not in sheet.given:
        return
    container = sheet.get(key, Container)
    if _holds(container, legal):
        return
    sheet.report(
        "container-narrow",
        key,
        got=container,
        low=legal[0],
        high=legal[1],
        format=_words(sheet, table),
        expected=", ".join(each.value for each in Container if _holds(each, legal)),
    )


def _holds(container: Container, legal: tuple[int, int]) -> bool:
    width = int(container.value[1:])
    if container.value[0] == "u":
        return legal[0] >= 0 and legal[1] < 1 << width
    return legal[0] >= -(1 << width - 1) and legal[1] < 1 << width - 1


def _check_preload(sheet: Sheet, accumulator: str, table: str) -> None:
    """Report a rounding constant in the sum where the rounding does not add one."""
    preload, rounding = f"{accumulator}.preload", f"{table}.rounding"
    if not sheet.usable(preload, rounding):
        return
    if sheet.get(preload, Preload) is Preload.ZERO:
        return
    direction = sheet.get(rounding, Rounding)
    if direction is not Rounding.TIES_TO_POSITIVE:
        sheet.report("preload-rounding", preload, got=direction, other=rounding)


def check_image(sheet: Sheet, ideal: Ideal | None) -> None:
    """Report a phase not below its step, and image sizes that leave a mosaic site empty."""
    if sheet.usable("image.step", "image.phase"):
        steps, phases = sheet.get("image.step", tuple), sheet.get("image.phase", tuple)
        for axis, step, phase in zip(_AXES, steps, phases, strict=True):
            if phase >= step:
                sheet.report("phase-too-large", "image.phase", axis=axis, got=phase, step=step)
    if ideal is not None:
        _check_sites(sheet, ideal)


def _check_sites(sheet: Sheet, ideal: Ideal) -> None:
    """Report sizes at which full extent reads from a site of which the image has no pixel."""
    keys = ("border.mode", "border.grid", "image.extent", "image.spacing")
    if not sheet.usable(*keys):
        return
    asks = (
        sheet.get("border.grid", Grid) is Grid.SITE,
        sheet.get("image.extent", Extent) is Extent.FULL,
        sheet.get("border.mode", BorderMode) is not BorderMode.CONSTANT,
    )
    if not all(asks):
        return
    spacing = sheet.get("image.spacing", tuple)
    for axis, part in enumerate(("height", "width")):
        key = f"image.{part}"
        if not sheet.usable(key) or ideal.box[axis] == 1:
            continue
        least, greatest = sheet.get(key, tuple)
        if least < spacing[axis]:
            sheet.report(
                "site-without-pixels",
                key,
                got=least,
                spacing=spacing[axis],
                remedy=f"{key} = [{spacing[axis]}, {max(greatest, spacing[axis])}]",
            )
