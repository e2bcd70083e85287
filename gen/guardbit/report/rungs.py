"""What `verify` prints: one line per rung, what it covered and what it did not, the verdict."""

from collections.abc import Iterator, Sequence

from rich.table import Table
from rich.text import Text

from guardbit.model.certificate import Figure, RungResult
from guardbit.model.decimals import lower, signed, upper
from guardbit.model.filter import Filter
from guardbit.model.sizing import ErrorBound
from guardbit.report.heads import head, words
from guardbit.report.look import STYLES, Look, drawn
from guardbit.report.text import grouped, plural

_STATES = {"holds": "holds", "fails": "FAILS", "not run": "not run", "open": "open"}


def state(rung: RungResult) -> str:
    """Return "holds", "fails", "not run" or "open". A rung that ran no case fails."""
    if not rung.ran:
        return "not run"
    if rung.undecided and not rung.findings:
        return "open"
    return "holds" if rung.holds else "fails"


def verify_text(look: Look, filter_: Filter, error: ErrorBound, rungs: Sequence[RungResult]) -> str:
    """Return the text of `verify` for one filter."""
    return drawn(
        look,
        *head(look, filter_),
        Text(),
        ladder(look, rungs),
        Text(),
        _figures(look, error, rungs),
        Text(),
        _verdict(look, rungs),
    )


def ladder(look: Look, rungs: Sequence[RungResult]) -> Table:
    """Return a row for each rung, with what it covered and what it did not."""
    table = Table.grid(padding=(0, 2))
    table.add_column(no_wrap=True)
    table.add_column(no_wrap=True)
    table.add_column(overflow="fold")
    for rung in rungs:
        kind = state(rung)
        sign = Text.assemble((f"  {look.sign(kind)} {_STATES[kind]:<7}", STYLES[kind]))
        table.add_row(sign, words(look, rung.name, "bold"), _count(rung))
        for label, note in _notes(rung):
            table.add_row("", words(look, label, _dim(look)), words(look, note, _dim(look)))
    return table


def _count(rung: RungResult) -> str:
    if not rung.ran:
        return ""
    parts = [plural(rung.cases, "case") if rung.cases else "0 cases, so nothing was shown"]
    if rung.findings:
        parts.append(plural(len(rung.findings), "finding"))
    return ", ".join(parts)


def _notes(rung: RungResult) -> Iterator[tuple[str, str]]:
    """Yield what a rung covered, what it did not, and its figures, each kind named once."""
    figures = "; ".join(f"{f.name}: {_value(f)}" for f in rung.figures if _tells(rung, f))
    measured = (figures,) if figures else ()
    for label, notes in (
        ("covered", rung.covered),
        ("not covered", rung.not_covered),
        ("measured", measured),
    ):
        for index, note in enumerate(notes):
            yield label if index == 0 else "", note


def _tells(rung: RungResult, figure: Figure) -> bool:
    """Return whether a figure says more than the rung's state and the lines below do."""
    return not _is_error(figure) and not (figure.value == 0 and rung.holds)


def _is_error(figure: Figure) -> bool:
    return figure.name.startswith("largest error")


def _dim(look: Look) -> str:
    return "dim" if look.colour else ""


def _figures(look: Look, error: ErrorBound, rungs: Sequence[RungResult]) -> Table:
    """Return the bound of the error, with the largest error that was measured beside it."""
    table = Table.grid(padding=(0, 2))
    table.add_column(min_width=22)
    table.add_column(overflow="fold")
    bound = f"{signed(lower(error.low))} .. {signed(upper(error.high))} LSB"
    condition = ", unless a register wraps or saturates" if error.assumes_no_wrap else ""
    table.add_row("  error bound", bound + condition)
    if error.overall is not None:
        low, high = error.overall
        table.add_row("  for any input", f"{signed(lower(low))} .. {signed(upper(high))} LSB")
    for figure in (f for rung in rungs for f in rung.figures if _is_error(f)):
        table.add_row(words(look, f"  {figure.name}"), words(look, _value(figure)))
    return table


def _value(figure: Figure) -> str:
    value = grouped(figure.value) if isinstance(figure.value, int) else figure.value
    return f"{value} {figure.unit}".rstrip()


def _verdict(look: Look, rungs: Sequence[RungResult]) -> Text:
    states = [state(rung) for rung in rungs]
    kind = next((k for k in ("fails", "not run", "open") if k in states), "holds")
    if not rungs:
        kind = "not run"
    count = len(states) if kind == "holds" else states.count(kind)
    summary = _SUMMARY[kind].format(n=plural(count, "rung"))
    return Text.assemble((f"  {look.sign(kind)} {summary}", STYLES[kind]))


_SUMMARY = {
    "holds": "holds: {n}, each to the last bit",
    "fails": "FAILS: {n}",
    "not run": "incomplete: {n} not run, the others hold",
    "open": "{n} open: neither shown nor refuted; the others hold",
}
