"""What each operator makes of a small routine, line by line."""

import pytest

from guardbit.model.enums import Container
from guardbit.model.routine import Entry, Role, Routine, SourceFile
from guardbit.verify.defects.mutant import Mutant, Operator
from guardbit.verify.defects.seeding import mutants, sample

C = """#include "f.h"

static int32_t f_index(int32_t at, int32_t length)
{
    return at < length ? at : length - 1;
}

static int32_t f_add(int32_t acc, int32_t product)
{
    const int32_t sum = acc + product;

    if (sum > 32767) {
        return 32767;
    }
    return sum;
}

static uint8_t f_tail(int32_t acc)
{
    const int32_t code = ((acc + 128) >> 8) + 16;

    if (code < 0) {
        return 0;
    }
    return (uint8_t)code;
}

static void f_row(const uint8_t *r0, const uint8_t *r1, size_t pitch, size_t count, uint8_t *dst)
{
    size_t i;

    for (i = 0; i < count; i++) {
        int32_t acc = 64;

        acc += 3 * (int32_t)r0[i] - r0[i + 1];
        acc += 5 * r1[i];
        acc = f_add(acc, -43 * r1[i]);
        acc = f_add(acc, 86 * r1[i + 1]);
        dst[i] = f_tail(acc);
    }
    (void)pitch;
}

int f_frame(const uint8_t *src, size_t src_stride, uint8_t *dst, size_t dst_stride, size_t width,
    size_t height, uint8_t *scratch, size_t scratch_len)
{
    size_t pitch;
    size_t y;

    if (src == NULL) {
        return F_BAD_POINTER;
    }
    if (width - 1u > 99u) {
        return F_BAD_SIZE;
    }
    if (scratch_len < width + 2) {
        return F_BAD_SCRATCH;
    }
    pitch = width + 2;
    for (y = 0; y < height; y++) {
        const uint32_t top = (uint32_t)f_index((int32_t)y - 1, (int32_t)height);

        f_row(src + top * src_stride, src + y * src_stride, pitch, width, dst + y * dst_stride);
    }
    (void)scratch;
    return F_OK;
}
"""
HEADER = "typedef uint16_t f_word;\n"


def routine(text: str = C) -> Routine:
    frame = Entry("f_frame", (Role.SRC, Role.DST))
    sources = (SourceFile("f.h", HEADER), SourceFile("f.c", text))
    return Routine(
        "f", sources, frame, None, None, Container.U8, Container.U8, 1, None, 0, 0, (1, 9), (1, 9)
    )


ALL = mutants(routine())

# an operator, and lines that it makes of the routine
MAKES = [
    (Operator.TAP, "acc += 4 * (int32_t)r0[i] - r0[i + 1];"),
    (Operator.TAP, "acc += 2 * (int32_t)r0[i] - r0[i + 1];"),
    (Operator.TAP, "acc += 3 * (int32_t)r0[i] - 2 * r0[i + 1];"),
    (Operator.TAP, "acc += 3 * (int32_t)r0[i] - 0 * r0[i + 1];"),
    (Operator.TAP, "acc = f_add(acc, -44 * r1[i]);"),
    (Operator.SIGN, "acc += 3 * (int32_t)r0[i] + r0[i + 1];"),
    (Operator.SIGN, "acc -= 5 * r1[i];"),
    (Operator.SIGN, "acc = f_add(acc, 43 * r1[i]);"),
    (Operator.SIGN, "acc = f_add(acc, -86 * r1[i + 1]);"),
    (Operator.SWAP, "f_row(src + top * src_stride, src + y * src_stride, width, pitch, dst + y * "
     "dst_stride);"),
    (Operator.ORDER, "acc = f_add(acc, 86 * r1[i + 1]); acc = f_add(acc, -43 * r1[i]);"),
    (Operator.COLUMN, "acc += 5 * r1[i + 1];"),
    (Operator.COLUMN, "acc += 3 * (int32_t)r0[i] - r0[i + 0];"),
    (Operator.COLUMN, "dst[i - 1] = f_tail(acc);"),
    (Operator.ROW, "acc += 5 * r0[i];"),
    (Operator.ROW, "const uint32_t top = (uint32_t)f_index((int32_t)y - 2, (int32_t)height);"),
    (Operator.BORDER, "return at < length ? at : length - 2;"),
    (Operator.BORDER, "{ return (at % length + length) % length; }"),
    (Operator.BORDER, "const uint32_t top = (uint32_t)((int32_t)y - 1);"),
    (Operator.ROUNDING, "const int32_t code = ((acc + 129) >> 8) + 16;"),
    (Operator.ROUNDING, "const int32_t code = ((acc + 0) >> 8) + 16;"),
    (Operator.ROUNDING, "const int32_t code = ((acc + 128) / 256) + 16;"),
    (Operator.ROUNDING, "int32_t acc = 63;"),
    (Operator.SHIFT, "const int32_t code = ((acc + 128) >> 9) + 16;"),
    (Operator.PEDESTAL, "const int32_t code = ((acc + 128) >> 8) + 15;"),
    (Operator.BOUND, "if (sum > 32768) {"),
    (Operator.BOUND, "return 32766;"),
    (Operator.BOUND, "if (code < 1) {"),
    (Operator.COMPARISON, "if (code <= 0) {"),
    (Operator.COMPARISON, "if (src != NULL) {"),
    (Operator.WIDTH, "int16_t acc = 64;"),
    (Operator.WIDTH, "static uint8_t f_tail(int16_t acc)"),
    (Operator.WIDTH, "typedef uint8_t f_word;"),
    (Operator.WIDENING, "acc += 3 * r0[i] - r0[i + 1];"),
    (Operator.SCRATCH, "if (scratch_len < width + 1) {"),
    (Operator.SCRATCH, "if (scratch_len <= width + 2) {"),
    (Operator.SCRATCH, "if (0) {"),
    (Operator.LOOP, "for (i = 0; i <= count; i++) {"),
    (Operator.LOOP, "for (i = 1; i < count; i++) {"),
    (Operator.LOOP, "for (y = 0; y < height - 1; y++) {"),
    (Operator.STRIDE, "pitch = width + 3;"),
    (Operator.STRIDE, "f_row(src + top * width, src + y * src_stride, pitch, width, dst + y * "
     "dst_stride);"),
    (Operator.CHECK, "if (width - 1u > 98u) {"),
    (Operator.CHECK, "return F_OK;"),
]  # fmt: skip


@pytest.mark.parametrize(("operator", "line"), MAKES)
def test_an_operator_makes_a_line(operator: Operator, line: str) -> None:
    assert line in [m.after for m in ALL if m.operator is operator]


def test_every_operator_is_seen() -> None:
    assert {m.operator for m in ALL} == set(Operator)


def test_a_mutant_differs_where_it_says() -> None:
    for mutant in ALL:
        own = HEADER if mutant.file == "f.h" else C
        assert mutant.text != own and mutant.before != mutant.after
        assert own.splitlines()[mutant.line - 1].split()[:1] == mutant.before.split()[:1]


def test_no_mutant_comes_twice() -> None:
    assert len({(m.file, m.text) for m in ALL}) == len(ALL)


def test_what_callers_see_keeps_its_types() -> None:
    head = C[C.index("int f_frame") : C.index("size_t pitch;\n    size_t y")]
    assert all(head in m.text for m in ALL if m.operator is Operator.WIDTH and m.file == "f.c")


def test_a_sample_has_all_operators_and_is_the_same_each_time() -> None:
    some = sample(ALL, 40)
    assert len(some) == 40
    assert {m.operator for m in some} == {m.operator for m in ALL}
    assert some == sample(mutants(routine()), 40)
    assert sample(ALL, None) == ALL


def test_code_without_sums_has_fewer_operators() -> None:
    found: tuple[Mutant, ...] = mutants(routine("int f_frame(int a)\n{\n    return a + 1;\n}\n"))
    assert {m.operator for m in found if m.file == "f.c"} == {Operator.PEDESTAL}
