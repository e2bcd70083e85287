"""The one JSON document that a command with `--json` writes.

    {"schema": 1, "tool": "guardbit 0.1.0", "command": "size", "status": 0, "specs": [
      {"spec": the path as given, "status": its own exit status,
       "findings": [{"kind", "place": {"file", "line", "key"}, "values": {...}, "sentence"}],
       "sizing": as in the certificate, or null,
       "certificate": for emit and verify, or null,
       "sheet": for size, or null, "search" and "fit": what size searched, or null,
       "pinned": whether size wrote that into the spec,
       "folder": where files were written, or "", "written": [{"name", "sha256"}]}]}

`prove` answers {"spec", "status", "findings", "proof": its rung, "cases": [{"model", "width",
"height", "codes", "bands", "verdict", "reason", "outputs"}], "folder", "written"} for each spec.

Canonical as the certificate is: sorted keys, ASCII, integers beyond 2^53 and fractions as
strings, no floats. `init` answers {"file"}, `explain` {"topics": [{"name", "text"}]}, instead
of "specs".
"""

from collections.abc import Sequence

from guardbit.cli.answer import Answer
from guardbit.cli.api import TOOL
from guardbit.model.canonical import dumps
from guardbit.model.finding import Finding
from guardbit.report.wording import sentence

SCHEMA = 1


def document(command: str, status: int, **content: object) -> str:
    """Return the JSON text for one run of a command."""
    return dumps({"schema": SCHEMA, "tool": TOOL, "command": command, "status": status, **content})


def specs_document(command: str, status: int, answers: Sequence[Answer]) -> str:
    """Return the JSON text for a command on specs."""
    return document(command, status, specs=[_answer(each) for each in answers])


def finding_entry(found: Finding) -> dict[str, object]:
    """Return a finding as an object, with its sentence."""
    return {
        "kind": found.kind,
        "place": found.place,
        "values": dict(found.values),
        "sentence": sentence(found),
    }


def _answer(answer: Answer) -> dict[str, object]:
    return {
        "spec": answer.spec,
        "status": answer.status,
        "findings": [finding_entry(each) for each in answer.findings],
        "sizing": answer.sizing,
        "certificate": answer.certificate,
        "sheet": answer.sheet,
        "search": answer.search,
        "fit": answer.fit,
        "pinned": answer.pinned,
        "folder": answer.folder,
        "written": answer.written,
    }
