"""Calls: of functions of the program, and of the few of the library that filters use."""

from collections.abc import Hashable, Sequence

from pycparser import c_ast

from guardbit.proof.algebra.values import Form, InexpressibleError, Table, Value
from guardbit.proof.c.scope import Callee, Frame, Run
from guardbit.proof.c.types import CHAR_BITS, Integer, Pointing, Void
from guardbit.proof.c.unit import RETURN, Compiled, Typed, Unit
from guardbit.proof.machine.context import Context, Site
from guardbit.proof.machine.memory import NULL, Block, Content, Pointer, Tag

RETURNED = 0
"""The slot of a frame that lists what the call has returned, each part with its mask."""

_LIBRARY = ("memcpy", "memmove", "memset")


def call(u: Unit, node: c_ast.FuncCall) -> Typed:
    """Return type and run of a call."""
    if not isinstance(node.name, c_ast.ID):
        u.refuse(node, "function-pointer")
    name = node.name.name
    arguments = node.args.exprs if node.args else []
    found = u.scope.find(name)
    if name in _LIBRARY and (found is None or name not in u.functions):
        return _library(u, name, arguments, node)
    if not isinstance(found, Callee):
        u.refuse(node, "unknown-function", name)
    kinds = found.kind.parameters
    if len(kinds) != len(arguments):
        u.refuse(node, "argument-count")
    pairs = zip(kinds, arguments, strict=True)
    runs = [u.assigned(kind, each) for kind, each in pairs]
    functions, site = u.functions, u.at(node)

    def run(frame: Frame) -> Content:
        values = [each(frame) for each in runs]
        callee = functions.get(name)
        if callee is None or callee.body is None:
            site.refused("unknown-function", name)
        return invoke(site, callee, values)

    return found.kind.returns, run


def invoke(site: Site, callee: Compiled, values: Sequence[Content]) -> Content:
    """Return what a function returns for these arguments; None from a void one."""
    key, symbol = _key(site.cx, values) if callee.pure else (None, None)
    if key is not None and key in callee.memory:
        kept, of = callee.memory[key]
        if symbol is None or of is None:
            return kept
        carried = site.cx.space.carried(kept, of, symbol)
        if carried is not None:
            return carried
    made = _run(site, callee, values)
    if key is not None and isinstance(made, int | Form | Table):
        callee.memory[key] = made, symbol
    return made


def _key(cx: Context, values: Sequence[Content]) -> tuple[Hashable | None, Form | Table | None]:
    """Return by what a result can be remembered, and the one symbol that it depends on."""
    symbol: Form | Table | None = None
    parts: list[Hashable] = []
    for value in values:
        if type(value) is int:
            parts.append(value)
        elif isinstance(value, Form | Table) and symbol is None and type(cx.mask) is int:
            symbol = value
            try:
                parts.append(("symbol", cx.space.shape(value)))
            except InexpressibleError:
                return None, None
            if parts[-1] == ("symbol", None):
                return None, None
        else:
            return None, None
    return tuple(parts), symbol


def _run(site: Site, callee: Compiled, values: Sequence[Content]) -> Content:
    frame: Frame = [None] * callee.slots
    parts: list[tuple[Value, Content]] = []
    frame[RETURNED] = parts  # type: ignore[call-overload]
    tags = _tagged(callee, values)
    for number, value in enumerate(tags or values):
        frame[1 + number] = value
    for slot in callee.in_memory:
        block = Block(callee.names[slot - 1], None, 1)
        block.cells[0] = frame[slot]
        frame[slot] = Pointer(block, 0, (0, 1))
    saved = site.cx.mask
    assert callee.body is not None
    if callee.body(frame) != RETURN and not isinstance(callee.kind.returns, Void):
        site.broken("no-value-returned")
    site.cx.mask = saved
    if tags:
        _check_tags(site, callee, tags)
    return _returned(site, callee, parts)


def _returned(site: Site, callee: Compiled, parts: list[tuple[Value, Content]]) -> Content:
    if isinstance(callee.kind.returns, Void):
        return None
    value = parts[-1][1]
    if len(parts) == 1:
        return value
    try:
        for mask, other in reversed(parts[:-1]):
            if isinstance(value, Pointer) or isinstance(other, Pointer):
                site.refused("pointer-by-pixel")
            value = site.cx.space.where(mask, other, value)  # type: ignore[arg-type]
    except InexpressibleError as error:
        site.refused(error.reason)
    return value


def _tagged(callee: Compiled, values: Sequence[Content]) -> list[Content] | None:
    """Return arguments that note what is done through them, if a restrict could be broken."""
    if not callee.restricts:
        return None
    blocks = [v.block for v in values if isinstance(v, Pointer) and v is not NULL]
    if len(blocks) == len({id(b) for b in blocks}):
        return None
    made: list[Content] = []
    for value in values:
        if isinstance(value, Pointer) and value is not NULL:
            p = value
            made.append(Pointer(p.block, p.index, (p.low, p.high), (*p.tags, Tag()), p.view))
        else:
            made.append(value)
    return made


def _check_tags(site: Site, callee: Compiled, values: list[Content]) -> None:
    """Break a rule if a cell changed meanwhile was reached around a restrict pointer.

    C99 6.7.3.1: while a restrict pointer is in scope, an object that is changed and reached
    through it is reached through it alone.
    """
    pairs = list(zip(callee.kind.parameters, values, strict=True))
    for kind, value in pairs:
        if not (isinstance(kind, Pointing) and kind.restrict and isinstance(value, Pointer)):
            continue
        own = value.tags[-1] if value.tags else None
        if own is None:
            continue
        for _, other in pairs:
            if other is value or not isinstance(other, Pointer) or not other.tags:
                continue
            through = other.tags[-1]
            if own.writes & (through.reads | through.writes) or own.reads & through.writes:
                site.broken("restrict-alias")


def _library(u: Unit, name: str, arguments: Sequence[c_ast.Node], node: c_ast.Node) -> Typed:
    if len(arguments) != 3:
        u.refuse(node, "argument-count")
    to_kind, to = u.value(arguments[0])
    second_kind, second = u.value(arguments[1])
    count_kind, count = u.integer(arguments[2])
    del count_kind
    if not isinstance(to_kind, Pointing):
        u.refuse(node, "incompatible-types")
    site = u.at(node)
    if name == "memset":
        if not isinstance(second_kind, Integer):
            u.refuse(node, "incompatible-types")
        return to_kind, _memset(site, to, second, count)
    if not isinstance(second_kind, Pointing):
        u.refuse(node, "incompatible-types")
    return to_kind, _memcpy(site, (to, second, count), may_overlap=name == "memmove")


def _cells(site: Site, p: Content, count: Content) -> int:
    """Return how many cells some bytes are, at a place whose cells have one type."""
    assert isinstance(p, Pointer)
    if not isinstance(count, int):
        site.refused("size-by-pixel")
    if p is NULL:
        site.broken("null-dereference")
    kind = p.block.kind
    if kind is None:
        site.refused("copy-of-mixed-cells")
    size = max(kind[0] // CHAR_BITS, 1)
    if count % size:
        site.refused("copy-of-part-of-a-cell")
    return count // size


def _memset(site: Site, to: Run, value: Run, count: Run) -> Run:
    def run(frame: Frame) -> Content:
        p, byte, n = to(frame), value(frame), count(frame)
        cells = _cells(site, p, n)
        assert isinstance(p, Pointer) and p.block.kind is not None
        bits, signed = p.block.kind
        if not isinstance(byte, int):
            site.refused("size-by-pixel")
        filled = int.from_bytes(bytes([byte & 255]) * max(bits // CHAR_BITS, 1), "little")
        stored = site.cx.space.wrap(filled, bits, signed)
        for k in range(cells):
            site.store(Pointer(p.block, p.index + k, (p.low, p.high), p.tags), stored)
        return p

    return run


def _memcpy(site: Site, runs: tuple[Run, Run, Run], *, may_overlap: bool) -> Run:
    to, source, count = runs

    def run(frame: Frame) -> Content:
        p, q, n = to(frame), source(frame), count(frame)
        cells = _cells(site, p, n)
        assert isinstance(p, Pointer) and isinstance(q, Pointer)
        if q is NULL:
            site.broken("null-dereference")
        if p.block.kind is None or q.block.kind is None or p.block.kind[0] != q.block.kind[0]:
            site.refused("copy-of-other-cells")
        if not may_overlap and p.block is q.block and abs(p.index - q.index) < cells:
            site.broken("overlapping-copy")
        kind = p.block.kind
        copied = [
            site.load(Pointer(q.block, q.index + k, (q.low, q.high), q.tags, kind))
            for k in range(cells)
        ]
        for k, value in enumerate(copied):
            site.store(Pointer(p.block, p.index + k, (p.low, p.high), p.tags), value)
        return p

    return run
