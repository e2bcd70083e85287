"""The certificate as canonical JSON, sealed, and back.

Its layout is the JSON Schema 2020-12 that the package carries as model/certificate.schema.json.
The seal is the SHA-256 of the canonical text without it. It shows a change by accident or by
hand; it is no signature.
"""

import hashlib
import json
from collections.abc import Mapping
from dataclasses import replace
from importlib.resources import files
from pathlib import PurePath
from typing import Any

from guardbit.model.canonical import dumps, plain
from guardbit.model.certificate import Certificate, RungResult
from guardbit.model.finding import Finding, Place, SpecError, Value, finding

SCHEMA = 1
# The values of findings that name a file.
_PATHS = ("path", "reproducer")


def certificate_text(certificate: Certificate) -> str:
    """Return the certificate as canonical JSON. Files are named without their folders."""
    rungs = tuple(_without_folders(rung) for rung in certificate.rungs)
    document = plain(replace(certificate, rungs=rungs))
    assert isinstance(document, dict)
    return sealed_text(document)


def sealed_text(document: Mapping[str, object]) -> str:
    """Return the canonical JSON of a document with its seal."""
    return dumps({**document, "seal": _seal(document)})


def load_certificate(text: str, file: str | None = None) -> Mapping[str, Any]:
    """Return the document that `certificate_text` wrote; integers beyond 2^53 are strings.

    Raises SpecError if the text is no certificate, if it is of another layout, or if
    anything in it was changed. `file` is named in the findings.
    """
    document = _parsed(text, file)
    if not isinstance(document, dict) or "seal" not in document or "schema" not in document:
        raise _corrupt("certificate-not-one", file)
    if document["schema"] != SCHEMA:
        raise _corrupt("certificate-schema", file, found=str(document["schema"]), known=SCHEMA)
    unsealed = {key: value for key, value in document.items() if key != "seal"}
    if document["seal"] != _seal(unsealed):
        raise _corrupt("certificate-changed", file)
    return document


def emitted_digests(document: Mapping[str, Any]) -> dict[str, str]:
    """Return the SHA-256 of each emitted file, by name, from a loaded certificate."""
    return {entry["name"]: entry["sha256"] for entry in document["emitted"]}


def schema_text() -> str:
    """Return the JSON Schema of a certificate."""
    return files("guardbit.model").joinpath("certificate.schema.json").read_text("utf-8")


def _parsed(text: str, file: str | None) -> object:
    try:
        return json.loads(text, parse_float=_refuse, parse_constant=_refuse)
    except (ValueError, RecursionError) as error:
        line = getattr(error, "lineno", None)
        reason = getattr(error, "msg", None) or str(error) or "nested too deeply"
        place = Place(file, line)
        raise SpecError(finding("certificate-syntax", place, reason=reason)) from None


def _refuse(number: str) -> object:
    raise ValueError(f"{number} is not an integer")


def _corrupt(kind: str, file: str | None, **values: Value) -> SpecError:
    return SpecError(finding(kind, Place(file), **values))


def _seal(document: object) -> str:
    return hashlib.sha256(dumps(document).encode("ascii")).hexdigest()


def _without_folders(rung: RungResult) -> RungResult:
    return replace(rung, findings=tuple(_bare(each) for each in rung.findings))


def _bare(each: Finding) -> Finding:
    """Return the finding with its files named without folders: the same on any machine."""
    place = each.place
    if place.file is not None:
        place = replace(place, file=PurePath(place.file).name)
    values = tuple((name, _bare_value(name, value)) for name, value in each.values)
    return replace(each, place=place, values=values)


def _bare_value(name: str, value: Value) -> Value:
    return PurePath(value).name if name in _PATHS and isinstance(value, str) else value
