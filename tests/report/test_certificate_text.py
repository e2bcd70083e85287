import json
import os
import types
import typing
from collections.abc import Callable
from dataclasses import fields, is_dataclass, replace
from enum import Enum
from fractions import Fraction
from pathlib import Path
from typing import Any, TypeAlias

import jsonschema
import pytest

from guardbit.model import canonical
from guardbit.model import certificate as model
from guardbit.model.certificate import Certificate
from guardbit.model.finding import SpecError
from guardbit.report.certificate import (
    SCHEMA,
    certificate_text,
    emitted_digests,
    load_certificate,
    schema_text,
)

Hint: TypeAlias = Any
Change = Callable[[dict[str, Any]], object]
Damage = Callable[[str], str]

_SAFE = 2**53
_FILE = Path(str(canonical.__file__)).with_name("certificate.schema.json")
_DIGEST = {"type": "string", "pattern": "^[0-9a-f]{64}$"}


def _schema() -> dict[str, Any]:
    """Return the schema that the frozen types of the model call for."""
    definitions: dict[str, Any] = {
        "integer": {
            "description": "A JSON integer; beyond 2^53 in size a string of decimal digits.",
            "oneOf": [
                {"type": "integer", "minimum": -_SAFE, "maximum": _SAFE},
                {"type": "string", "pattern": "^-?[1-9][0-9]{15,}$"},
            ],
        },
        "fraction": {
            "description": "An exact ratio n/d in lowest terms, or an integer, as a string.",
            "type": "string",
            "pattern": "^-?[0-9]+(/[1-9][0-9]*)?$",
        },
    }
    root = _object(Certificate, definitions)
    root["properties"]["schema"] = {"const": SCHEMA}
    root["properties"]["seal"] = {
        "description": "SHA-256 of the canonical text of everything else.",
        **_DIGEST,
    }
    root["required"] = sorted([*root["required"], "seal"])
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "guardbit certificate",
        "$defs": definitions,
        **root,
    }


def _object(kind: Hint, definitions: dict[str, Any]) -> dict[str, Any]:
    hints = typing.get_type_hints(kind)
    properties = {f.name: _of(hints[f.name], definitions) for f in fields(kind)}
    if kind is model.Digest:
        properties["sha256"] = _DIGEST
    # A dataclass without words of its own gets its signature as its docstring.
    own = "" if kind.__doc__.startswith(f"{kind.__name__}(") else " ".join(kind.__doc__.split())
    return {
        **({"description": own} if own else {}),
        "type": "object",
        "properties": properties,
        "required": sorted(properties),
        "additionalProperties": False,
    }


def _of(hint: Hint, definitions: dict[str, Any]) -> dict[str, Any]:
    simple = {
        bool: {"type": "boolean"},
        str: {"type": "string"},
        type(None): {"type": "null"},
        int: {"$ref": "#/$defs/integer"},
        Fraction: {"$ref": "#/$defs/fraction"},
    }
    if hint in simple:
        return simple[hint]
    origin: Hint = typing.get_origin(hint)
    if origin in (types.UnionType, typing.Union):
        return {"anyOf": [_of(each, definitions) for each in typing.get_args(hint)]}
    if origin is tuple:
        return _tuple(typing.get_args(hint), definitions)
    name = hint.__name__
    if name not in definitions:
        definitions[name] = {}
        definitions[name] = _named(hint, definitions)
    return {"$ref": f"#/$defs/{name}"}


def _tuple(arguments: tuple[Any, ...], definitions: dict[str, Any]) -> dict[str, Any]:
    if arguments[-1] is Ellipsis:
        return {"type": "array", "items": _of(arguments[0], definitions)}
    parts = [_of(each, definitions) for each in arguments]
    return {"type": "array", "prefixItems": parts, "items": False, "minItems": len(parts)}


def _named(hint: Hint, definitions: dict[str, Any]) -> dict[str, Any]:
    if is_dataclass(hint):
        return _object(hint, definitions)
    assert issubclass(hint, Enum), hint
    return {"enum": [each.value for each in hint]}


def test_shipped_schema_is_what_the_types_say() -> None:
    text = json.dumps(_schema(), indent=2, sort_keys=True) + "\n"
    if os.environ.get("GUARDBIT_ACCEPT", "0") not in ("", "0"):
        _FILE.write_text(text, encoding="ascii")
    assert schema_text() == text, "accept it with: GUARDBIT_ACCEPT=1 pytest tests/report"


def test_schema_is_one() -> None:
    jsonschema.Draft202012Validator.check_schema(json.loads(schema_text()))


def _valid(document: object) -> bool:
    return bool(jsonschema.Draft202012Validator(json.loads(schema_text())).is_valid(document))


def test_text_is_valid_and_returns(certificate: Certificate) -> None:
    text = certificate_text(certificate)
    document = load_certificate(text)
    jsonschema.Draft202012Validator(json.loads(schema_text())).validate(document)
    assert canonical.dumps(document) == text
    assert emitted_digests(document) == {"soften3.c": "cd" * 32}
    assert text.isascii() and text.endswith("}\n")


def test_large_integers_are_strings(certificate: Certificate) -> None:
    figures = load_certificate(certificate_text(certificate))["rungs"][0]["figures"]
    assert [figure["value"] for figure in figures] == ["0.5", str(2**60)]


def test_no_folder_is_recorded(certificate: Certificate) -> None:
    assert "/home/" not in certificate_text(certificate)
    assert "soften3.toml" in certificate_text(certificate)


@pytest.mark.parametrize(
    ("change", "valid"),
    [
        (lambda d: d, True),
        (lambda d: d.pop("plan"), False),
        (lambda d: d.update(extra=1), False),
        (lambda d: d["spec"].update(sha256="AB" * 32), False),
        (lambda d: d["sizing"]["registers"][0]["final"].update(low=2**53 + 1), False),
        (lambda d: d["sizing"]["registers"][0]["final"].update(low=str(2**53 + 1)), True),
        (lambda d: d["sizing"]["registers"][0].update(headroom="1/0"), False),
        (lambda d: d["sizing"]["registers"][0].update(headroom=None), True),
        (lambda d: d["sizing"]["filter"].update(operation="blur"), False),
        (lambda d: d["rungs"][0].update(ran=1), False),
    ],
)
def test_schema_tells_right_from_wrong(
    certificate: Certificate, change: Change, valid: bool
) -> None:
    document = json.loads(certificate_text(certificate))
    change(document)
    assert _valid(document) is valid


@pytest.mark.parametrize(
    ("damage", "kind"),
    [
        (lambda t: "", "certificate-syntax"),
        (lambda t: t[: len(t) // 2], "certificate-syntax"),
        (lambda t: "[" * 100_000, "certificate-syntax"),
        (lambda t: "[1, 2]", "certificate-not-one"),
        (lambda t: "{}", "certificate-not-one"),
        (lambda t: '{"schema": 1.5, "seal": ""}', "certificate-syntax"),
        (lambda t: '{"schema": NaN, "seal": ""}', "certificate-syntax"),
        (lambda t: t.replace('"schema": 1', '"schema": 2'), "certificate-schema"),
        (lambda t: t.replace('"bits": 16', '"bits": 17'), "certificate-changed"),
        (lambda t: t.replace("direct", "direst"), "certificate-changed"),
    ],
)
def test_damage_is_a_finding(certificate: Certificate, damage: Damage, kind: str) -> None:
    with pytest.raises(SpecError) as caught:
        load_certificate(damage(certificate_text(certificate)), "x.cert.json")
    assert [found.kind for found in caught.value.findings] == [kind]
    assert caught.value.findings[0].place.file == "x.cert.json"


def test_other_layout_of_the_same_content_is_sound(certificate: Certificate) -> None:
    squeezed = json.dumps(json.loads(certificate_text(certificate)))
    assert load_certificate(squeezed) == load_certificate(certificate_text(certificate))


def test_rungs_change_the_seal(certificate: Certificate) -> None:
    without = load_certificate(certificate_text(replace(certificate, rungs=())))
    assert without["seal"] != load_certificate(certificate_text(certificate))["seal"]
