"""Tokens of C and where they stand."""

import pytest

from guardbit.verify.defects.lexer import Source, number_like, value

TEXT = """
#include <stdint.h>
/* a comment with { brackets ( and 12 numbers */
static int32_t twice(int32_t a)
{
    if (a < 0) {
        return -1; // no { here
    }
    return 2 * a;
}
#define LONG \\
    { 1
int run(const uint8_t *src, size_t n)
{
    size_t i;
    int32_t sum = 0;
    for (i = 0; i < n; i++) {
        sum += (int32_t)src[i + 1];
    }
    return twice(sum) >> 0x3u;
}
"""


@pytest.fixture
def source() -> Source:
    return Source("a.c", TEXT)


def index(source: Source, text: str, number: int = 0) -> int:
    return [k for k in range(len(source)) if source.at(k) == text][number]


def test_comments_and_directives_are_no_tokens(source: Source) -> None:
    texts = [token.text for token in source.tokens]
    assert "12" not in texts and "here" not in texts and "LONG" not in texts
    assert texts[:4] == ["static", "int32_t", "twice", "("]
    assert all(source.text[t.start : t.end] == t.text for t in source.tokens)


def test_functions(source: Source) -> None:
    first, second = source.functions
    assert (first.name, first.static, second.name, second.static) == ("twice", True, "run", False)
    assert source.words(first.parameters) == ["(", "int32_t", "a", ")"]
    assert source.at(second.body.last) == "}"


def test_statements(source: Source) -> None:
    written = [source.written(s) for s in source.statements]
    assert written == [
        "return -1;",
        "return 2 * a;",
        "size_t i;",
        "int32_t sum = 0;",
        "sum += (int32_t)src[i + 1];",
        "return twice(sum) >> 0x3u;",
    ]


def test_headers_and_conditions(source: Source) -> None:
    ((start, condition, step),) = source.headers
    assert [source.written(s) for s in (start, condition, step)] == ["i = 0", "i < n", "i++"]
    assert [source.written(s) for s in source.conditions] == ["a < 0"]


def test_casts_and_operators(source: Source) -> None:
    assert source.is_cast(index(source, "int32_t", 3) - 1)
    assert not source.is_cast(index(source, "twice", 1) + 1)
    assert source.is_binary(index(source, "+"), "+")
    assert not source.is_binary(index(source, "-"), "-")
    assert source.is_binary(index(source, "*"), "*")


def test_lines_are_those_of_the_file(source: Source) -> None:
    assert source.line(index(source, "sum", 1)) == TEXT[: TEXT.index("sum +=")].count("\n") + 1


@pytest.mark.parametrize(
    ("text", "number"),
    [("0", 0), ("65534u", 65534), ("0x1F", 31), ("10UL", 10), ("017", None), ("x", None)],
)
def test_values(text: str, number: int | None) -> None:
    assert value(text) == number


def test_a_number_keeps_its_suffix() -> None:
    assert number_like("65534u", 65535) == "65535u"
    assert number_like("0", -1) == "(-1)"
