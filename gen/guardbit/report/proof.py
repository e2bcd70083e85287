"""What `prove` prints: what is proved, why that is enough, what it rests on, what remains."""

from rich.text import Text

from guardbit.model.certificate import RungResult
from guardbit.model.filter import Filter
from guardbit.report.heads import head
from guardbit.report.look import STYLES, Look, drawn
from guardbit.report.rungs import ladder, state
from guardbit.report.text import plural

_VERDICTS = {
    "holds": "proved: every output, for every legal pixel value, at the sizes above",
    "fails": "REFUTED: some frame gives something else, or breaks a rule of C",
    "open": "open: {n} neither proved nor refuted",
    "not run": "not run",
}


def proof_text(look: Look, f: Filter, rung: RungResult) -> str:
    """Return the text of `prove` for one filter."""
    kind = state(rung)
    said = _VERDICTS[kind].format(n=plural(rung.undecided, "case"))
    verdict = Text.assemble((f"  {look.sign(kind)} {said}", STYLES[kind]))
    return drawn(look, *head(look, f), Text(), ladder(look, [rung]), Text(), verdict)
