"""The table that `size` prints: registers, requantisers and the error bound."""

from collections.abc import Callable, Sequence
from fractions import Fraction

from rich.table import Table
from rich.text import Text

from guardbit.model.decimals import lower, nearest, signed, upper
from guardbit.model.filter import Pass, Requantiser, registers_of
from guardbit.model.sizing import (
    DcGain,
    ErrorBound,
    Interval,
    RegisterSizing,
    RequantiserSizing,
    RoundingStatistics,
    Sizing,
    TapOrder,
)
from guardbit.report.heads import head, words
from guardbit.report.look import Look, drawn
from guardbit.report.text import interval, plural, ratio

_LABELS = 22
_BAR = 24
_OWN = "    (of the spec's own kernel: others that are loaded have no ideal to differ from)"
_CONDITION = "    (the bound in all: for inputs that make no register wrap or saturate)"


def size_text(look: Look, sizing: Sizing, orders: Sequence[TapOrder] = ()) -> str:
    """Return the text of `size` for one filter.

    Of `orders`, one for each register, those are told that need fewer bits than the contract's.
    """
    return drawn(
        look,
        *head(look, sizing.filter),
        Text(),
        _passes(look, sizing, orders),
        Text(),
        _error(look, sizing.error),
        *([Text(_CONDITION)] if sizing.error.assumes_no_wrap else []),
        *([Text(), _gain(sizing.error.gain)] if sizing.error.gain is not None else []),
        *([Text(_OWN)] if registers_of(sizing.filter) is not None else []),
    )


def _grid(columns: int) -> Table:
    table = Table.grid(padding=(0, 2))
    table.add_column(min_width=_LABELS)
    for _ in range(columns):
        table.add_column()
    return table


def _passes(look: Look, sizing: Sizing, orders: Sequence[TapOrder]) -> Table:
    table = _grid(len(sizing.registers))
    table.add_row(_title("register"), *(words(look, r.name, "bold") for r in sizing.registers))
    for label, show in _REGISTER_ROWS:
        table.add_row(f"    {label}", *(show(look, r) for r in sizing.registers))
    policies = [Text(_policy(each)) for each in sizing.filter.passes]
    table.add_row("    policy", *policies)
    if any(each.best < each.contract for each in orders):
        table.add_row("    best tap order", *(order_text(each) for each in orders))
    table.add_row(
        _title("requantiser"), *(words(look, r.name, "bold") for r in sizing.requantisers)
    )
    table.add_row("    rule", *(Text(_rule(p.requantiser)) for p in sizing.filter.passes))
    for label, tell in _REQUANTISER_ROWS:
        table.add_row(f"    {label}", *(tell(r) for r in sizing.requantisers))
    found = {each.name: each for each in sizing.error.rounding}
    if found:
        told = (_moments(found.get(r.name)) for r in sizing.requantisers)
        table.add_row("    rounding, if busy", *told)
    return table


def order_text(order: TapOrder) -> str:
    """Return what the best tap order found needs, and what none undercuts."""
    found = f"{plural(order.best, 'bit')} found"
    if order.best == order.contract:
        found = f"the contract's, {plural(order.contract, 'bit')}"
    return found if order.is_proved_best else f"{found}, floor {order.floor}"


def _moments(found: RoundingStatistics | None) -> str:
    if found is None:
        return "-"
    return f"mean {signed(nearest(found.mean))}, variance {nearest(found.variance)}"


def _bold(text: str) -> Text:
    return Text.assemble((text, "bold"))


def _title(text: str) -> Text:
    return _bold(f"  {text}")


def _policy(each: Pass) -> str:
    preload = ", preload rounding" if each.accumulator.preload.value == "rounding" else ""
    return f"{each.accumulator.overflow.value}{preload}"


def _given(_: Look, register: RegisterSizing) -> Text:
    return Text(f"{register.bits} bits {'signed' if register.signed else 'unsigned'}")


def _bar(look: Look, register: RegisterSizing) -> Text:
    """Return one mark per bit (or two, or four): needed, spare, missing."""
    scale = next(s for s in (1, 2, 4, 8) if max(register.bits, register.bits_forbid) <= _BAR * s)
    wanted, given = -(-register.bits_forbid // scale), -(-register.bits // scale)
    full, empty, missing = "■□▲" if look.fine else "#.!"
    enough = _is_enough(register)
    return Text.assemble(
        (full * min(wanted, given), "green" if enough else "red"),
        empty * max(0, given - wanted),
        (missing * max(0, wanted - given), "bold red"),
        f" needs {register.bits_forbid} of {register.bits}{', signed' * register.is_never_safe}",
    )


def _ends(register: RegisterSizing) -> str:
    return "" if register.exact else " (bound)"


def _headroom(_: Look, register: RegisterSizing) -> Text:
    if register.headroom is None:
        return Text("unlimited: the sum is 0")
    style = "" if register.headroom >= 1 else "bold red"
    return Text.assemble((f"{ratio(register.headroom)} to 1", style))


def needed(register: RegisterSizing, bits: int, sums: Interval) -> str:
    """Return the bits that sums need; a signed register's where an unsigned one cannot do."""
    said = plural(bits, "bit")
    return said if register.signed or sums.low >= 0 else f"{said} signed"


def spare(register: RegisterSizing) -> str:
    """Return the spare bits of a register."""
    return "none: sums below 0" if register.spare is None else signed(str(register.spare))


def _spare(_: Look, register: RegisterSizing) -> Text:
    return Text.assemble((spare(register), "" if _is_enough(register) else "bold red"))


def _is_enough(register: RegisterSizing) -> bool:
    return register.spare is not None and register.spare >= 0


_REGISTER_ROWS: Sequence[tuple[str, Callable[[Look, RegisterSizing], Text]]] = (
    ("given", _given),
    ("bits used", _bar),
    ("final sum", lambda _, r: Text(interval(r.final) + _ends(r))),
    ("partial sums", lambda _, r: Text(interval(r.partial) + _ends(r))),
    ("needed by forbid", lambda _, r: Text(needed(r, r.bits_forbid, r.partial))),
    ("needed by wrap", lambda _, r: Text(needed(r, r.bits_wrap, r.final))),
    ("spare bits", _spare),
    ("headroom", _headroom),
    ("rule: sum of |h|", lambda _, r: Text(plural(r.rule_l1, "bit"))),
    ("rule: tap count", lambda _, r: Text(plural(r.rule_count, "bit"))),
    ("witnesses", lambda _, r: Text(plural(len(r.witnesses), "frame"))),
)

_REQUANTISER_ROWS: Sequence[tuple[str, Callable[[RequantiserSizing], Text]]] = (
    ("input", lambda r: Text(interval(r.argument))),
    ("rounded", lambda r: Text(interval(r.unlimited))),
    ("output codes", lambda r: Text(interval(r.output))),
    ("width inside", lambda r: Text(plural(r.bits, "bit"))),
)


def _rule(requantiser: Requantiser) -> str:
    scale = f" * 2^{requantiser.exponent}" if requantiser.exponent else ""
    divide = f" / {requantiser.divisor}" if requantiser.divisor != 1 else ""
    pedestal = f" + {requantiser.to.pedestal}" if requantiser.to.pedestal > 0 else ""
    if requantiser.to.pedestal < 0:
        pedestal = f" - {-requantiser.to.pedestal}"
    sum_ = f"acc{scale}{divide}{pedestal}"
    return f"{sum_}, {requantiser.rounding.value}, {requantiser.overflow.value}"


def _error(look: Look, error: ErrorBound) -> Table:
    table = _grid(3)
    table.add_row(_title("error in LSB"), _bold("least"), _bold("greatest"))
    for part in error.parts:
        table.add_row(Text("    ").append(words(look, part.cause)), *_pair(part.low, part.high))
    attained = ["attained"] if error.exact else []
    table.add_row("    bound in all", *_pair(error.low, error.high), *attained)
    if error.overall is not None:
        table.add_row("    for any input", *_pair(*error.overall))
    return table


def _gain(gain: DcGain) -> Text:
    label = ("  DC gain".ljust(_LABELS + 2), "bold")
    ideal, fitted = nearest(gain.ideal), nearest(gain.fitted)
    if gain.error == 0:
        return Text.assemble(label, f"{fitted}, as ideal")
    off = signed(nearest(gain.at_full_scale))
    return Text.assemble(label, f"{fitted} for {ideal}: {off} LSB at full scale")


def _pair(low: Fraction, high: Fraction) -> tuple[Text, Text]:
    return Text(signed(lower(low))), Text(signed(upper(high)))
