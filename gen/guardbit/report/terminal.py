"""The texts of all commands for a person; each is a function from a frozen type to a string."""

from collections.abc import Sequence

from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from guardbit.model.certificate import Digest
from guardbit.model.filter import Filter
from guardbit.model.finding import Finding
from guardbit.report.heads import head, safe, words
from guardbit.report.look import STYLES, Look, drawn
from guardbit.report.rungs import verify_text
from guardbit.report.sheet import sheet_text
from guardbit.report.widths import size_text
from guardbit.report.wording import sentence, where

__all__ = [
    "emit_text",
    "finding_line",
    "folder_text",
    "next_line",
    "pinned_text",
    "sheet_text",
    "size_text",
    "topic_text",
    "verify_text",
    "written_text",
]

_LABELS = 22


def emit_text(look: Look, filter_: Filter, folder: str, files: Sequence[Digest]) -> str:
    """Return the text of `emit` for one filter: what was written, and its digests."""
    return drawn(look, *head(look, filter_), Text(), *_written(look, folder, files))


def folder_text(look: Look, folder: str, files: Sequence[Digest]) -> str:
    """Return what was written into a folder, and its digests."""
    return drawn(look, *_written(look, folder, files))


def _written(look: Look, folder: str, files: Sequence[Digest]) -> tuple[Text, Table]:
    table = Table.grid(padding=(0, 2))
    table.add_column(min_width=_LABELS, overflow="fold")
    table.add_column(style="dim" if look.colour else "")
    for file in files:
        table.add_row(words(look, f"    {file.name}"), f"sha256 {file.sha256[:16]}")
    return Text("  written to ").append(words(look, folder)), table


def pinned_text(look: Look, spec: str, pinned: bool) -> str:
    """Return the line that says what `--pin` did to a spec."""
    if pinned:
        return drawn(look, words(look, f"  pinned: what was found is written in {spec}"))
    return drawn(look, words(look, f"  pinned: nothing; {spec} leaves nothing to search"))


def finding_line(look: Look, finding: Finding) -> str:
    """Return a finding on a line of its own, never wrapped, so that editors can follow it."""
    line = safe(look, sentence(finding))
    place = safe(look, where(finding.place))
    if look.colour and place:
        return f"\x1b[1m{place}:\x1b[0m{line[len(place) + 1 :]}\n"
    return f"{line}\n"


def next_line(look: Look, advice: str) -> str:
    """Return what to do next, after something failed."""
    line = Text.assemble((f"{look.sign('note')} ", STYLES["note"]), safe(look, advice))
    return drawn(look, line)


def topic_text(look: Look, name: str, text: str, lines: Sequence[tuple[str, str]]) -> str:
    """Return a topic: its name, what there is to say, and named lines."""
    table = Table.grid(padding=(0, 2))
    table.add_column(min_width=_LABELS, overflow="fold")
    table.add_column()
    for label, line in lines:
        table.add_row(words(look, f"  {label}"), words(look, line))
    body = Padding(words(look, text), (0, 0, 0, 2))
    return drawn(look, words(look, name, "bold"), body, *([table] if lines else []))


def written_text(look: Look, file: str) -> str:
    """Return the line that says that a file was written."""
    return drawn(look, words(look, f"written: {file}"))
