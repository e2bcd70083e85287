"""The sizing sheet: one page for a design review, as terminal text and as Markdown.

Both are drawn from the same tables, so that they cannot differ.
"""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction

from rich.table import Table
from rich.text import Text

from guardbit.model.cost import PassCost
from guardbit.model.decimals import (
    lower,
    lower_decibels,
    nearest,
    signed,
    upper,
    upper_decibels,
)
from guardbit.model.filter import registers_of
from guardbit.model.frequency import Frequency, Gain
from guardbit.model.practice import Measured, MeasuredRounding, Narrowed, RegisterPractice
from guardbit.model.sheet import Sheet
from guardbit.model.sizing import DcGain, ErrorBound, RegisterSizing, RoundingStatistics, TapOrder
from guardbit.report.cautions import CAUTIONS
from guardbit.report.heads import head, signature
from guardbit.report.look import Look, drawn
from guardbit.report.text import grouped, interval, plural, ratio, shown
from guardbit.report.widths import needed, order_text, spare

_LABELS = 26
_NOTHING = "-"
_ATTAINED = "legal frames attain both ends"
_UNATTAINED = "never exceeded, but no frame need attain it"


@dataclass(frozen=True)
class Block:
    """A table with a title over its first column, and notes below it."""

    title: str
    columns: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    notes: tuple[str, ...] = ()


def sheet_text(look: Look, sheet: Sheet) -> str:
    """Return the sheet for a terminal."""
    parts = [part for block in blocks(sheet) for part in (Text(), *_drawn_block(block))]
    cautions = Text(" ".join(CAUTIONS), style="dim" if look.colour else "")
    return drawn(look, *head(look, sheet.sizing.filter), *parts, Text(), cautions)


def sheet_markdown(sheet: Sheet) -> str:
    """Return the sheet as Markdown."""
    f = sheet.sizing.filter
    summary = f": {_cell(f.summary)}" if f.summary else ""
    lines = [f"# {f.name}{summary}", "", _cell(signature(f)), ""]
    for block in blocks(sheet):
        lines += [*_markdown_block(block), ""]
    return "\n".join([*lines, *CAUTIONS]) + "\n"


def blocks(sheet: Sheet) -> tuple[Block, ...]:
    """Return the tables of a sheet, in their order."""
    sizing = sheet.sizing
    made = [
        _registers(sizing.registers, sheet.orders),
        _requantisers(sheet),
        _error(sizing.error, registers_of(sizing.filter) is not None),
        *_rounding(sizing.error.rounding, sheet.rounding),
        *_gain(sizing.error.gain),
        _response(sheet.frequency),
        _cost(sheet),
    ]
    if sheet.measured is not None:
        made.append(_measured(sheet.photographs, sheet.measured))
    if sheet.practice is not None:
        made += [_practice(each) for each in sheet.practice.registers]
    return tuple(made)


def _drawn_block(block: Block) -> Iterator[Table | Text]:
    table = Table.grid(padding=(0, 2))
    table.add_column(min_width=_LABELS, no_wrap=True)
    for _ in block.columns:
        table.add_column()
    titles = (f"  {block.title}", *block.columns)
    table.add_row(*(Text.assemble((each, "bold")) for each in titles))
    for label, *cells in block.rows:
        table.add_row(Text(f"    {label}"), *map(Text, cells))
    yield table
    yield from (Text(f"    {note}") for note in block.notes)


def _markdown_block(block: Block) -> list[str]:
    titles = (block.title, *block.columns)
    lines = [_line(titles), _line(["---"] * len(titles)), *map(_line, block.rows)]
    return [*lines, *(part for note in block.notes for part in ("", note))]


def _line(cells: Sequence[str]) -> str:
    return f"| {' | '.join(map(_cell, cells))} |"


def _cell(text: str) -> str:
    """Return foreign text that neither ends a cell nor begins markup."""
    return "".join(f"\\{c}" if c in "\\|<[`*_" else c for c in shown(text))


def _registers(registers: Sequence[RegisterSizing], orders: Sequence[TapOrder]) -> Block:
    rows = {
        "given": [f"{r.bits} bits {'signed' if r.signed else 'unsigned'}" for r in registers],
        "final sum": [_range(interval(r.final), r.exact) for r in registers],
        "partial sums": [_range(interval(r.partial), r.exact) for r in registers],
        "holds": [_range(interval(r.held), r.held_exact) for r in registers],
        "needed by forbid": [needed(r, r.bits_forbid, r.partial) for r in registers],
        "needed by saturate": [
            f"{needed(r, r.bits_forbid, r.partial)} not to act" for r in registers
        ],
        "needed by wrap": [needed(r, r.bits_wrap, r.final) for r in registers],
        "spare bits": [spare(r) for r in registers],
        "headroom": [
            "unlimited" if r.headroom is None else f"{ratio(r.headroom)} to 1" for r in registers
        ],
        "rule: sum of |h|": [plural(r.rule_l1, "bit") for r in registers],
        "rule: tap count": [plural(r.rule_count, "bit") for r in registers],
    }
    if orders:
        rows["best tap order"] = [order_text(order) for order in orders]
    return Block("register", tuple(r.name for r in registers), _rows(rows))


def _rows(rows: dict[str, list[str]]) -> tuple[tuple[str, ...], ...]:
    return tuple((label, *cells) for label, cells in rows.items())


def _range(text: str, exact: bool) -> str:
    return text if exact else f"{text} (bound)"


def _requantisers(sheet: Sheet) -> Block:
    stages = sheet.sizing.requantisers
    rows = {
        "input": [interval(r.argument) for r in stages],
        "rounded": [_range(interval(r.unlimited), r.exact) for r in stages],
        "output codes": [_range(interval(r.output), r.output_exact) for r in stages],
        "width inside": [plural(r.bits, "bit") for r in stages],
    }
    return Block("requantiser", tuple(r.name for r in stages), _rows(rows))


def _error(error: ErrorBound, is_loaded: bool) -> Block:
    rows = [(part.cause, *_ends(part.low, part.high)) for part in error.parts]
    rows.append(("bound in all", *_ends(error.low, error.high)))
    quiet = "for inputs that make no register wrap or saturate; " if error.assumes_no_wrap else ""
    notes = [f"bound in all: {quiet}{_ATTAINED if error.exact else _UNATTAINED}"]
    if error.overall is not None:
        rows.append(("for any input", *_ends(*error.overall)))
        notes.append(f"for any input: {_UNATTAINED}")
    if is_loaded:
        notes.append("of the spec's own kernel, as all below: others that are loaded have no ideal")
    return Block("error in LSB", ("least", "greatest"), tuple(rows), tuple(notes))


def _ends(low: Fraction, high: Fraction) -> tuple[str, str]:
    return signed(lower(low)), signed(upper(high))


def _rounding(
    model: Sequence[RoundingStatistics], measured: Sequence[MeasuredRounding]
) -> Iterator[Block]:
    if not model:
        return
    found = {each.name: (each.mean, each.variance) for each in measured}
    both = [((each.mean, each.variance), found.get(each.name)) for each in model]
    rows = [
        (each.name, *_moments(by_model), *(_moments(seen) if measured else ()))
        for each, (by_model, seen) in zip(model, both, strict=True)
    ]
    columns = ("mean, LSB", "variance, LSB^2", *(("measured", "measured") if measured else ()))
    note = "by model: all residues equally frequent, as in busy images; not a bound"
    yield Block("rounding adds", columns, tuple(rows), (note,))


def _moments(values: tuple[Fraction, Fraction] | None) -> tuple[str, str]:
    if values is None:
        return _NOTHING, _NOTHING
    mean, variance = values
    return signed(nearest(mean)), nearest(variance)


def _gain(gain: DcGain | None) -> Iterator[Block]:
    if gain is not None:
        relative = _NOTHING if gain.relative is None else f"{nearest(100 * gain.relative)} %"
        ideal, fitted, at_full_scale = map(nearest, (gain.ideal, gain.fitted, gain.at_full_scale))
        columns = ("ideal", "fitted", "error", "LSB at full scale")
        yield Block("DC", columns, (("gain", ideal, fitted, relative, at_full_scale),))


def _response(frequency: Frequency) -> Block:
    names = ("DC", "vertical Nyquist", "horizontal Nyquist", "both Nyquist")
    rows = [
        (
            name,
            _place(each),
            nearest(each.ideal),
            nearest(each.fitted),
            _decibels(abs(each.deviation), frequency),
        )
        for name, each in zip(names, frequency.gains, strict=True)
    ]
    largest = frequency.largest
    at = ", ".join(nearest(part) for part in largest.at)
    rows.append(("largest deviation", at, "", "", _decibels(largest.guaranteed, frequency)))
    note = (
        f"no frequency, on a grid or between, deviates by more than {upper(largest.guaranteed, 9)}"
    )
    return Block(
        "frequency response", ("cycles/pixel", "ideal", "fitted", "deviation"), tuple(rows), (note,)
    )


def _place(gain: Gain) -> str:
    return ", ".join(str(part) for part in gain.at)


def _decibels(value: Fraction, frequency: Frequency) -> str:
    """Return a deviation relative to the DC gain, or to the largest where that is zero."""
    if not value:
        return "none"
    reference = frequency.reference
    return f"{upper_decibels((value / reference) ** 2)} dB" if reference else _NOTHING


def _if_fixed(count: int | None) -> str:
    return _NOTHING if count is None else grouped(count)


_COSTS: Sequence[tuple[str, Callable[[PassCost], str]]] = (
    ("reads", lambda p: grouped(p.reads)),
    ("multipliers", lambda p: grouped(p.multipliers)),
    ("taps that only shift", lambda p: grouped(p.shifts)),
    ("adders", lambda p: grouped(p.adders)),
    ("multipliers, folded", lambda p: grouped(p.folded_multipliers)),
    ("magnitudes, distinct", lambda p: grouped(p.magnitudes)),
    ("odd factors, distinct", lambda p: _if_fixed(p.constants)),
    ("signed-digit adders", lambda p: _if_fixed(p.signed_digit_adders)),
    ("coefficient bits", lambda p: grouped(p.constant_bits)),
    (
        "line buffer",
        lambda p: f"{plural(p.line_rows, 'row')}, {plural(p.line_bits, 'bit')} a pixel of width",
    ),
)


def _cost(sheet: Sheet) -> Block:
    cost = sheet.cost
    rows = tuple((label, *(tell(p) for p in cost.passes)) for label, tell in _COSTS)
    widest, line_bits = grouped(cost.widest), grouped(cost.line_bits)
    note = f"line buffers at the greatest width, {widest}: {line_bits} bits"
    return Block("cost of one result", tuple(p.name for p in cost.passes), rows, (note,))


def _measured(photographs: Sequence[str], found: Measured) -> Block:
    rows = (
        ("error, least", signed(lower(found.least))),
        ("error, greatest", signed(upper(found.greatest))),
        ("error, mean", signed(nearest(found.mean))),
        ("error, variance", nearest(found.variance)),
        ("signal to noise", _snr(found.snr)),
    )
    title = f"measured, {grouped(found.outputs)} codes"
    return Block(title, ("LSB",), rows, (f"of {', '.join(map(shown, photographs))}",))


def _snr(value: Fraction | None) -> str:
    if value is None:
        return "no error"
    return f"{lower_decibels(value)} dB" if value else "no signal"


def _practice(found: RegisterPractice) -> Block:
    rows = tuple(
        (f"{each.bits} bits, {each.policy.value}", *_narrowed(each)) for each in found.rows
    )
    columns = ("sums overflow", "codes differ", "by at most", "by, on average")
    safe = f"{found.safe} bits are safe for every frame"
    if found.is_never_safe:
        safe = "unsigned, it is safe at no width: sums go below 0"
    note = f"{found.register} alone, on the photographs; {safe}"
    return Block(f"{found.register}, narrower", columns, rows, (note,))


def _narrowed(each: Narrowed) -> tuple[str, ...]:
    mean = Fraction(each.total, each.outputs) if each.outputs else Fraction(0)
    return (
        _share(each.overflowed, each.sums),
        _share(each.differing, each.outputs),
        f"{grouped(each.largest)} LSB",
        f"{nearest(mean)} LSB",
    )


def _share(part: int, whole: int) -> str:
    if not part:
        return "none"
    return f"{upper(Fraction(100 * part, whole), 4)} %"
