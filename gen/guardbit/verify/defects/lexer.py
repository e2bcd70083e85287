"""Tokens of a C file with where they stand: function, statement, brackets, loop headers."""

import re
from dataclasses import dataclass, field
from functools import cached_property

_TOKEN = re.compile(
    r"(?P<skip>\s+|/\*.*?\*/|//[^\n]*|^[ \t]*\#(?:\\\n|[^\n])*)"
    r"|(?P<name>[A-Za-z_]\w*)"
    r"|(?P<number>\d\w*)"
    r"|(?P<text>\"(?:\\.|[^\"\\])*\"|'(?:\\.|[^'\\])*')"
    r"|(?P<sign>>>=|<<=|\.\.\.|->|\+\+|--|<<|>>|<=|>=|==|!=|&&|\|\||[-+*/%&|^]=|[^\s\w])",
    re.DOTALL | re.MULTILINE,
)
_NUMBER = re.compile(r"(0[xX][0-9a-fA-F]+|\d+)([uUlL]*)")
_CLOSES = {")": "(", "]": "[", "}": "{"}

INTEGER = re.compile(r"u?int(?:8|16|32|64)_t|size_t")
"""The names of integer types that the operators know."""


@dataclass(frozen=True)
class Token:
    """A token: `kind` is name, number, text or sign; `start`..`end` its place in the text."""

    kind: str
    text: str
    start: int
    end: int


@dataclass(frozen=True)
class Span:
    """Tokens `first`..`last`, both included."""

    first: int
    last: int

    def __contains__(self, index: int) -> bool:
        return self.first <= index <= self.last


@dataclass(frozen=True)
class Function:
    """A function's definition: the tokens of its head, its parameters and its body."""

    name: str
    static: bool
    head: Span
    parameters: Span
    body: Span


@dataclass(frozen=True)
class Source:
    """A C file as tokens. Comments and lines of the preprocessor are no tokens."""

    name: str
    text: str
    tokens: tuple[Token, ...] = field(init=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "tokens", tuple(_tokens(self.text)))

    def __len__(self) -> int:
        return len(self.tokens)

    def at(self, index: int) -> str:
        """Return a token's text; nothing beyond the ends."""
        return self.tokens[index].text if 0 <= index < len(self.tokens) else ""

    def kind(self, index: int) -> str:
        """Return a token's kind; nothing beyond the ends."""
        return self.tokens[index].kind if 0 <= index < len(self.tokens) else ""

    def words(self, span: Span) -> list[str]:
        """Return the texts of the tokens of a span."""
        return [token.text for token in self.tokens[span.first : span.last + 1]]

    def written(self, span: Span) -> str:
        """Return a span as it stands in the file."""
        return self.text[self.tokens[span.first].start : self.tokens[span.last].end]

    def line(self, index: int) -> int:
        """Return the line of a token, from 1."""
        return self.text.count("\n", 0, self.tokens[index].start) + 1

    @cached_property
    def mate(self) -> dict[int, int]:
        """Return for each bracket the index of the one that matches it."""
        found: dict[int, int] = {}
        waiting: list[int] = []
        for index, token in enumerate(self.tokens):
            if token.text in ("(", "[", "{"):
                waiting.append(index)
            elif token.text in _CLOSES and waiting:
                opener = waiting.pop()
                found[opener], found[index] = index, opener
        return found

    @cached_property
    def opener(self) -> list[int]:
        """Return for each token the innermost bracket around it, -1 if there is none."""
        found: list[int] = []
        around: list[int] = [-1]
        for index, token in enumerate(self.tokens):
            if token.text in _CLOSES and len(around) > 1:
                around.pop()
            found.append(around[-1])
            if token.text in ("(", "[", "{"):
                around.append(index)
        return found

    def around(self, index: int) -> list[int]:
        """Return the brackets around a token, the innermost first."""
        found = []
        while (index := self.opener[index]) >= 0:
            found.append(index)
        return found

    @cached_property
    def functions(self) -> tuple[Function, ...]:
        """Return the functions that are defined, in order."""
        found = []
        for index, token in enumerate(self.tokens):
            if token.text != "{" or self.opener[index] >= 0 or self.at(index - 1) != ")":
                continue
            opening = self.mate[index - 1]
            first = opening - 1
            while first > 0 and self.at(first - 1) not in (";", "}"):
                first -= 1
            found.append(
                Function(
                    self.at(opening - 1),
                    "static" in self.words(Span(first, opening)),
                    Span(first, opening - 1),
                    Span(opening, index - 1),
                    Span(index, self.mate[index]),
                )
            )
        return tuple(found)

    @cached_property
    def statements(self) -> tuple[Span, ...]:
        """Return the statements that end with a semicolon in function bodies, in order.

        The head of an `if` or a loop is not part of the statement that it governs.
        """
        found = []
        for function in self.functions:
            first = function.body.first + 1
            index = first
            while index < function.body.last:
                text = self.at(index)
                if text in ("if", "for", "while", "switch") and index == first:
                    index = first = self.mate[index + 1] + 1
                    continue
                if text in ("{", "}", "else", "do") and (index == first or text == "}"):
                    first = index + 1
                elif text in ("(", "[", "{"):
                    index = self.mate[index]
                elif text == ";":
                    if index > first:
                        found.append(Span(first, index))
                    first = index + 1
                index += 1
        return tuple(found)

    @cached_property
    def headers(self) -> tuple[tuple[Span, Span, Span], ...]:
        """Return (start, condition, step) of every `for`, without semicolons; may be empty."""
        found = []
        for index, token in enumerate(self.tokens):
            if token.text == "for" and self.at(index + 1) == "(":
                opening = index + 1
                ends = [
                    k
                    for k in range(opening, self.mate[opening])
                    if self.at(k) == ";" and self.opener[k] == opening
                ]
                if len(ends) == 2:
                    found.append(
                        (
                            Span(opening + 1, ends[0] - 1),
                            Span(ends[0] + 1, ends[1] - 1),
                            Span(ends[1] + 1, self.mate[opening] - 1),
                        )
                    )
        return tuple(found)

    @cached_property
    def conditions(self) -> tuple[Span, ...]:
        """Return what stands in the brackets of every `if`."""
        return tuple(
            Span(index + 2, self.mate[index + 1] - 1)
            for index, token in enumerate(self.tokens)
            if token.text == "if" and self.at(index + 1) == "("
        )

    def is_operand_end(self, index: int) -> bool:
        """Return whether an operand may end with that token."""
        if self.at(index) in ("return", "case", "else", "do", "sizeof"):
            return False
        return self.kind(index) in ("name", "number") or self.at(index) in (")", "]")

    def is_cast(self, index: int) -> bool:
        """Return whether a bracket opens a cast to an integer type of that name."""
        if self.at(index) != "(" or self.at(index + 2) != ")":
            return False
        named = INTEGER.fullmatch(self.at(index + 1)) or self.at(index + 1).endswith("_word")
        operand = self.kind(index + 3) in ("name", "number") or self.at(index + 3) in ("(", "-")
        return bool(named) and operand and self.at(index - 1) != "sizeof"

    def is_binary(self, index: int, *signs: str) -> bool:
        """Return whether a token is one of the signs, between two operands."""
        if self.at(index) not in signs or not self.is_operand_end(index - 1):
            return False
        return not (self.at(index - 1) == ")" and self.is_cast(self.mate[index - 1]))


def _tokens(text: str) -> list[Token]:
    found = []
    for match in _TOKEN.finditer(text):
        kind = match.lastgroup or ""
        if kind != "skip":
            found.append(Token(kind, match[0], match.start(), match.end()))
    return found


def value(text: str) -> int | None:
    """Return the value of an integer constant; None if it is none."""
    match = _NUMBER.fullmatch(text)
    return int(match[1], 0) if match and not _is_octal(match[1]) else None


def _is_octal(digits: str) -> bool:
    return len(digits) > 1 and digits.isdigit() and digits[0] == "0"


def number_like(text: str, number: int) -> str:
    """Return an integer constant of another value, with the same suffix."""
    match = _NUMBER.fullmatch(text)
    suffix = match[2] if match else ""
    return f"{number}{suffix}" if number >= 0 else f"({number}{suffix})"
