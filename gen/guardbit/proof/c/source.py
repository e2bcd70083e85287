"""From C sources to syntax trees: a preprocessor and a parser that need no compiler."""

import io
from collections.abc import Mapping, Sequence

import pcpp
from pycparser import c_ast, c_generator, c_parser

from guardbit.model.proof import DataModel, Place
from guardbit.model.routine import SourceFile
from guardbit.proof.c.headers import headers
from guardbit.proof.machine.errors import RefusedError

_DEFINED = ("__attribute__(x)", "__extension__", "__inline=inline", "__restrict=restrict")
_MOST_TEXT = 100


class _Preprocessor(pcpp.Preprocessor):  # type: ignore[misc]
    """Reads included files from memory. Its complaints are raised."""

    def __init__(self, files: Mapping[str, str]) -> None:
        super().__init__()
        self._files = files
        for each in _DEFINED:
            self.define(each.replace("=", " "))
        self.define("__STDC__ 1")
        self.define("__STDC_VERSION__ 199901L")
        self.define("__STDC_HOSTED__ 0")

    def on_file_open(self, is_system_include: bool, includepath: str) -> io.StringIO:
        del is_system_include
        name = _basename(includepath)
        if name not in self._files:
            raise FileNotFoundError(name)
        return io.StringIO(self._files[name])

    def on_include_not_found(self, *found: object) -> None:
        raise RefusedError("unknown-header", Place(_basename(self.source), 0, str(found[-1])))

    def on_error(self, file: str, line: int, msg: str) -> None:
        raise RefusedError("preprocessor-error", Place(_basename(file), line, msg[:_MOST_TEXT]))

    def on_directive_handle(self, directive, toks, ifpassthru, precedingtoks):  # type: ignore[no-untyped-def]  # noqa: ANN001, ANN202
        if directive.value == "pragma":
            raise pcpp.OutputDirective(pcpp.Action.IgnoreAndRemove)
        return super().on_directive_handle(directive, toks, ifpassthru, precedingtoks)

    def on_directive_unknown(self, directive, toks, ifpassthru, precedingtoks):  # type: ignore[no-untyped-def]  # noqa: ANN001, ANN202
        del ifpassthru, precedingtoks
        text = "".join(str(each.value) for each in toks).strip()
        place = Place(_basename(directive.source), int(directive.lineno), text)
        raise RefusedError(f"{directive.value}-directive", place)


def preprocessed(source: SourceFile, files: Mapping[str, str], model: DataModel) -> str:
    """Return the text of a source with nothing left to preprocess but line markers."""
    reader = _Preprocessor({**headers(model), **files})
    reader.parse(source.text, source.name)
    out = io.StringIO()
    reader.write(out)
    return out.getvalue()


def tree(source: SourceFile, sources: Sequence[SourceFile], model: DataModel) -> c_ast.FileAST:
    """Return the syntax tree of a source. Raises RefusedError."""
    text = preprocessed(source, {each.name: each.text for each in sources}, model)
    try:
        return c_parser.CParser().parse(text, source.name)
    except c_parser.ParseError as error:
        raise RefusedError("syntax", _place_of(str(error), source.name)) from None


def _place_of(message: str, name: str) -> Place:
    """Return the place that a parser's message begins with: file:line:column: words."""
    parts = message.split(":", 3)
    if len(parts) == 4 and parts[1].strip().isdigit():
        return Place(_basename(parts[0]), int(parts[1]), parts[3].strip()[:_MOST_TEXT])
    return Place(name, 0, message[:_MOST_TEXT])


def place(node: c_ast.Node) -> Place:
    """Return where a node stands, with its text."""
    at = node.coord
    text = " ".join(c_generator.CGenerator().visit(node).split())
    if len(text) > _MOST_TEXT:
        text = text[: _MOST_TEXT - 3] + "..."
    return Place(_basename(str(at.file)), int(at.line), text) if at else Place("", 0, text)


def _basename(path: str) -> str:
    return path.replace("\\", "/").rsplit("/", 1)[-1]
