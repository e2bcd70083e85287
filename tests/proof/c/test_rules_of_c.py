"""Each rule of C that an input can break is found at its line; and what is refused is told."""

import pytest

from guardbit.model.proof import ILP32, IP16, LP64, DataModel
from guardbit.model.routine import SourceFile
from guardbit.proof.algebra.values import Form, Table, Value
from guardbit.proof.c.program import Program
from guardbit.proof.machine.errors import BrokenError, BudgetError, RefusedError

HEAD = "#include <stdint.h>\n#include <stddef.h>\n#include <string.h>\n"
FUNCTION = "int64_t f(int a, int b)\n{{\n    (void)a; (void)b;\n    {}\n}}\n"


def run(text: str, model: DataModel = LP64, *, strict: bool = True, whole: bool = False) -> Value:
    """What f(a, b) gives for a in -128..127 and b in 0..255."""
    body = text if whole else FUNCTION.format(text)
    made = Program([SourceFile("f.c", HEAD + body)], model, strict=strict)
    space = made.begin(budget=10_000).space
    found = made.call("f", [space.pixel(-128, 127), space.pixel(0, 255)])
    assert isinstance(found, int | Form | Table)
    return found


BROKEN = [
    ("signed-overflow", IP16, "return 200 * b;"),
    ("signed-overflow", LP64, "return a * 16777217;"),
    ("signed-overflow", ILP32, "int32_t v = 1073741824; return v + v * (b > 3);"),
    ("signed-overflow", IP16, "uint8_t v = (uint8_t)b; return v * v * 0 + 40 * (b * 10);"),
    ("uninitialised-read", LP64, "int c; if (a > 0) c = 1; return c;"),
    ("uninitialised-read", LP64, "int v[2]; v[0] = a; return v[1];"),
    ("out-of-bounds-read", LP64, "int v[2] = { 0, 0 }; return v[2 + b * 0];"),
    ("out-of-bounds-read", LP64, "static const uint8_t t[255] = { 1 }; return t[b];"),
    ("out-of-bounds-write", LP64, "int v[2]; for (int i = 0; i < 3; i++) v[i] = a; return v[0];"),
    ("pointer-arithmetic", LP64, "int v[2] = { 0, 0 }; int *p = v - 1; return p[1] + a;"),
    ("pointer-arithmetic", LP64, "int v[2] = { 0, 0 }; int *p = v + 3; return p[-2];"),
    ("null-dereference", LP64, "int *p = NULL; return *p;"),
    ("shift-count", LP64, "return 1 << 32;"),
    ("shift-count", IP16, "return 1 << 16;"),
    ("shift-count", LP64, "return 1 << (b - 1);"),
    ("shift-of-negative", LP64, "return a << 2;"),
    ("division-by-zero", LP64, "return 100 / b;"),
    ("arithmetic-shift", LP64, "return a >> 1;"),
    ("narrowing", LP64, "return (int8_t)b;"),
    ("narrowing", IP16, "return (int16_t)((uint16_t)(a + 128) * 257u);"),
    ("unsequenced", LP64, "int i = 0; i = i++ + 1; return i;"),
    ("unsequenced", LP64, "int v[2] = { 0, 0 }; int i = 0; v[i] = i++; return v[0];"),
    ("overlapping-copy", LP64, "uint8_t v[3] = { 0 }; memcpy(v + 1, v, 2); return v[0];"),
    ("no-value-returned", LP64, "if (a > 0) return 1;"),
]


@pytest.mark.parametrize(("reason", "model", "body"), BROKEN)
def test_a_broken_rule_is_found(reason: str, model: DataModel, body: str) -> None:
    with pytest.raises(BrokenError) as caught:
        run(body, model)
    assert caught.value.reason == reason
    assert caught.value.place.file == "f.c" and caught.value.place.line >= 4


WHOLE = {
    "restrict-alias": (
        "static void add(int *restrict p, const int *q) { *p = *q + 1; *p += *q; }\n"
        "int64_t f(int a, int b) { int v = a; add(&v, &v); return v + b; }\n"
    ),
    "pointers-of-different-arrays": (
        "int64_t f(int a, int b) { int u[1] = { a }, v[1] = { b }; return u < v; }\n"
    ),
}


@pytest.mark.parametrize("reason", WHOLE)
def test_a_rule_broken_between_functions(reason: str) -> None:
    with pytest.raises(BrokenError) as caught:
        run(WHOLE[reason], whole=True)
    assert caught.value.reason == reason


SOUND = [
    "if (b == 0) return 0; return 100 / b;",
    "int c = a; if (c < 0) c = 0; return c >> 1;",
    "if (b > 127) return 0; return (int8_t)b;",
    "static const uint8_t t[10] = { 1 }; return b < 10 ? t[b] : 0;",
    "uint8_t v[4] = { 0 }; for (size_t i = 3; i < 4; i--) v[i] = (uint8_t)b; return v[0];",
    "int v[2] = { 1, 2 }; int *end = v + 2; return end[-1];",
    "return a > 0 && 1000 / a > 10;",
]


@pytest.mark.parametrize("body", SOUND)
def test_sound_code_raises_no_alarm(body: str) -> None:
    run(body)


@pytest.mark.parametrize(
    ("reason", "body"),
    [
        ("floating-point", "float c = 1; return c;"),
        ("jump", "goto end; end: return a;"),
        ("array-of-variable-length", "int v[b]; return 0;"),
        ("static-variable", "static int c; return c++;"),
        ("loop-by-pixel", "int s = 0; while (s < b) s++; return s;"),
        ("switch-by-pixel", "switch (b) { case 0: return 1; default: return 2; }"),
        ("product-of-pixels", "return a * b;"),
        ("address-by-pixel", "int v[256]; v[b] = 1; return 0;"),
        ("declaration-of-function", "extern int g(int); return 0;"),
        ("unknown-function", "return helper(a);"),
        ("pointer-cast", "int c = a; return *(char **)(&c) != 0;"),
    ],
)
def test_what_is_not_taken_is_refused_with_its_line(reason: str, body: str) -> None:
    with pytest.raises(RefusedError) as caught:
        run(body)
    assert caught.value.reason == reason
    assert caught.value.place.line >= 4


@pytest.mark.parametrize(
    ("reason", "text"),
    [
        ("recursion", "static int g(int v) { return v ? g(v - 1) : 0; }\n"),
        ("union", "union u { int i; };\nstatic union u v;\n"),
        ("bit-field", "struct s { int i : 3; };\n"),
        ("unknown-header", '#include "other.h"\n'),
        ("error-directive", "#error no\n"),
        ("syntax", "int x = ;\n"),
    ],
)
def test_sources_that_are_not_taken(reason: str, text: str) -> None:
    with pytest.raises(RefusedError) as caught:
        Program([SourceFile("f.c", HEAD + text)], LP64, strict=True)
    assert caught.value.reason == reason


def test_a_run_without_end_is_given_up() -> None:
    with pytest.raises(BudgetError):
        run("for (;;) { } return 0;")


def test_reliances_are_listed_where_they_are_allowed() -> None:
    text = HEAD + FUNCTION.format("return (a >> 1) + (int8_t)b;")
    made = Program([SourceFile("f.c", text)], LP64, strict=False)
    cx = made.begin()
    made.call("f", [cx.space.pixel(-128, 127), cx.space.pixel(0, 255)])
    found = [(a.reliance.value, a.interval.low, a.interval.high) for a in cx.reliances()]
    assert sorted(found) == [("arithmetic-shift", -128, 127), ("narrowing", 0, 255)]


def test_types_follow_the_data_model() -> None:
    """40000 is long where int has 16 bits, and 0x8000 unsigned (C99 6.4.4.1)."""
    assert run("return 40000 * 3 + 0 * a;", IP16) == 120000
    assert run("return (0x8000 > -1) + 0 * a;", IP16) == 0
    assert run("return (0x8000 > -1) + 0 * a;", LP64) == 1
    assert run("return (int64_t)(sizeof(size_t) * 8) + 0 * a;", IP16) == 16
    assert run("return (-1 < 1u) + 0 * a;", LP64) == 0
