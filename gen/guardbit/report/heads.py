"""The lines that say which filter the text below is about."""

from rich.console import RenderableType
from rich.padding import Padding
from rich.text import Text

from guardbit.model.enums import BorderMode, Outside
from guardbit.model.filter import Axis, Filter, Kernel, PixelFormat, registers_of
from guardbit.report.look import Look
from guardbit.report.text import ascii_shown, plural, shown


def words(look: Look, text: str, style: str = "") -> Text:
    """Return foreign text made safe for the stream that `look` describes."""
    # As a part, not as the whole Text's style, which would also colour what is appended.
    return Text.assemble((safe(look, text), style))


def safe(look: Look, text: str) -> str:
    """Return `text` in characters that the stream shows and that steer nothing."""
    return shown(text) if look.fine else ascii_shown(text)


def head(look: Look, filter_: Filter) -> list[RenderableType]:
    """Return the filter's name and summary, and its contract in a line or two."""
    title = words(look, filter_.name, "bold")
    if filter_.summary:
        title.append("  ").append(words(look, filter_.summary))
    contract = Text(signature(filter_), style="dim" if look.colour else "")
    return [title, Padding(contract, (0, 0, 0, 2))]


def signature(filter_: Filter) -> str:
    """Return what the filter does, in one line: formats, taps, operation, geometry."""
    formats = " -> ".join(
        [short_format(filter_.input), *(short_format(p.requantiser.to) for p in filter_.passes)]
    )
    parts = [formats, _taps(filter_), filter_.operation.value, _border(filter_)]
    return ", ".join([*parts, *_geometry(filter_)])


def short_format(pixel: PixelFormat) -> str:
    """Return a format in a word, such as u12 or i16, with what is special about it."""
    name = f"{'i' if pixel.signed else 'u'}{pixel.bits}"
    full = _codes(pixel)
    notes = [
        f"frac {pixel.frac}" if pixel.frac else "",
        f"pedestal {pixel.pedestal}" if pixel.pedestal else "",
        f"{pixel.low}..{pixel.high}" if (pixel.low, pixel.high) != full else "",
    ]
    inside = ", ".join(note for note in notes if note)
    return f"{name} ({inside})" if inside else name


def _codes(pixel: PixelFormat) -> tuple[int, int]:
    if pixel.signed:
        return -(2 ** (pixel.bits - 1)), 2 ** (pixel.bits - 1) - 1
    return 0, 2**pixel.bits - 1


def _taps(filter_: Filter) -> str:
    counts = [_live(each.kernel) for each in filter_.passes]
    box = f"{_length(filter_.geometry.rows)}x{_length(filter_.geometry.columns)}"
    if len(counts) == 1:
        loaded = " loaded" if registers_of(filter_) is not None else ""
        return f"{plural(counts[0], 'tap')}{loaded} in {box}"
    return f"{counts[0]} then {plural(counts[1], 'tap')} in {box}"


def _live(kernel: Kernel) -> int:
    return len(kernel.live)


def _length(axis: Axis) -> int:
    return (axis.greatest - axis.least) // axis.spacing + 1


def _border(filter_: Filter) -> str:
    border = filter_.border
    value = f" {border.value}" if border.mode is BorderMode.CONSTANT else ""
    grid = "" if border.grid.value == "pixel" else f" by {border.grid.value}"
    return f"border {border.mode.value}{value}{grid}"


def _geometry(filter_: Filter) -> list[str]:
    rows, columns = filter_.geometry.rows, filter_.geometry.columns
    parts = [f"extent {filter_.geometry.extent.value}"]
    if (rows.step, columns.step) != (1, 1):
        parts.append(f"step {rows.step}x{columns.step}")
    if (rows.spacing, columns.spacing) != (1, 1):
        parts.append(f"spacing {rows.spacing}x{columns.spacing}")
    if filter_.geometry.channels != 1:
        parts.append(f"{filter_.geometry.channels} channels")
    if filter_.outside is not Outside.UNDEFINED:
        parts.append(f"outside codes: {filter_.outside.value}")
    return parts
