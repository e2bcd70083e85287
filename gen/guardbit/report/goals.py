"""What the search for a goal found, for a person: the words, the figures, and what binds."""

from rich.table import Table
from rich.text import Text

from guardbit.model.decimals import lower, lower_decibels, upper
from guardbit.model.enums import WordLength
from guardbit.model.frequency import FactorFit, ResponseFit
from guardbit.model.goal import Binding, GoalSearch, Shortfall
from guardbit.report.look import Look, drawn
from guardbit.report.text import grouped, plural

_LABELS = 22
_NAMES = {
    WordLength.ACCUMULATOR: "accumulator",
    WordLength.INTERMEDIATE: "intermediate",
    WordLength.COEFFICIENT: "coefficient",
}


def goal_text(look: Look, found: GoalSearch) -> str:
    """Return the text of a search: each key with its number, what it reaches, what binds."""
    table = Table.grid(padding=(0, 2))
    table.add_column(min_width=_LABELS)
    table.add_column(justify="left")
    table.add_row(Text.assemble(("  found", "bold")), _looked(found))
    for key, value in found.values:
        table.add_row(f"    {key}", _shown(value))
    table.add_row(Text.assemble(("  reaches", "bold")), "")
    table.add_row("    error", f"{upper(found.figures.error)} LSB at most")
    if found.figures.response is not None:
        table.add_row("    response", f"{upper(found.figures.response)} deviation at most")
    if found.figures.snr is not None:
        table.add_row("    signal to noise", f"{lower_decibels(found.figures.snr)} dB at least")
    if found.bindings:
        table.add_row(Text.assemble(("  binds", "bold")), "")
    for binding in found.bindings:
        label, said = _binding(binding, found)
        table.add_row(label, said)
    return drawn(look, table)


def _looked(found: GoalSearch) -> str:
    return f"of {grouped(found.choices)} choices, {grouped(found.analysed)} of them analysed"


def _shown(value: int | tuple[int, ...]) -> str:
    return str(value) if isinstance(value, int) else f"[{', '.join(map(str, value))}]"


def _binding(binding: Binding, found: GoalSearch) -> tuple[str, str]:
    bits = found.figures.bits(binding.word)
    label = f"    {_NAMES[binding.word]}, {plural(bits, 'bit')}"
    if binding.bits is None or binding.missed is None:
        return label, "no choice has fewer" if binding.proved else "none with fewer was found"
    fewest = "at best" if binding.proved else "at the best found"
    return label, f"{fewest} with fewer ({binding.bits}): {_missed(binding.missed)}"


def _missed(missed: Shortfall) -> str:
    match missed.goal:
        case "error":
            return f"error {upper(missed.reached)} LSB, over {upper(missed.wanted)}"
        case "response":
            return f"response {upper(missed.reached)}, over {upper(missed.wanted)}"
    reached, wanted = lower_decibels(missed.reached), lower_decibels(missed.wanted)
    return f"signal to noise {reached} dB, under {wanted}"


def fit_text(look: Look, found: ResponseFit) -> str:
    """Return the text of a `response` fit: what each factor reaches, and what is proved."""
    table = Table.grid(padding=(0, 2))
    table.add_column(min_width=_LABELS)
    table.add_column(justify="left")
    table.add_row(Text.assemble(("  response fit", "bold")), f"in {found.seconds} s")
    for each in found.factors:
        table.add_row(
            f"    {each.name}, frac {each.frac}", f"deviation at most {upper(each.deviation)}"
        )
        if each.nearest is not None:
            table.add_row("    of nearest", f"deviation at most {upper(each.nearest)}")
        table.add_row("    no others have less than", _bound(each))
    return drawn(look, table)


def _bound(each: FactorFit) -> str:
    if each.proved:
        return f"{lower(each.bound)}: this is the best of their symmetry"
    gap = upper(100 * each.gap)
    return f"{lower(each.bound)}: best found, gap {gap} %; a longer search may find better"
