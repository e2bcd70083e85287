/* align6.c - a two-dimensional filter in integer arithmetic
 *
 * Half-pixel shift, six taps, two passes with 8 bits in between
 *
 * Written by guardbit 0.1.0 from a spec with SHA-256
 * 2377bc762dc7a96b0fa82494f6eb226793cdee3367bdff59a4e7e42d6930fc24.
 * Change the spec and emit again rather than edit this file. It belongs to you, the owner of
 * the spec, under any terms you like; it comes without warranty.
 */
#include "align6.h"

/* Index of the pixel that position `at` of an axis reads: the nearest edge pixel. */
static int32_t align6_index(int32_t at, int32_t length)
{
    if (at < 0) {
        return 0;
    }
    return at < length ? at : length - 1;
}

/* Fill `row` with row e - 2 of the source, columns -2 to width + 2, extended by the border. */
static void align6_extend(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, align6_word *ALIGN6_RESTRICT row)
{
    const int32_t y = align6_index((int32_t)e - 2, (int32_t)height);
    const uint8_t *const line = src + (size_t)y * src_stride;
    const int32_t columns = (int32_t)width + 5;
    int32_t x;

    for (x = 0; x < 2; x++) {
        row[x] = line[align6_index(x - 2, (int32_t)width)];
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = line[x - 2];
    }
    for (; x < columns; x++) {
        row[x] = line[align6_index(x - 2, (int32_t)width)];
    }
}

/* acc / 2^7, rounded to nearest, ties toward plus infinity (acc started at one half), held
 * to 0 to 255. acc is -8096 to 40864. */
static uint8_t align6_first_requantise(int32_t acc)
{
    const int32_t code = ((acc + 8192) >> 7) - 64;

    if (code < 0) {
        return 0;
    }
    if (code > 255) {
        return 255;
    }
    return (uint8_t)code;
}

/* The first pass, over one row. */
static void align6_first(const align6_word *r0, size_t count, align6_word *ALIGN6_RESTRICT row)
{
    size_t i;

    for (i = 0; i < count; i++) {
        int32_t acc = 64;

        acc += 3 * (int32_t)r0[i] - 16 * (int32_t)r0[i + 1] + 77 * (int32_t)r0[i + 2]
            + 77 * (int32_t)r0[i + 3] - 16 * (int32_t)r0[i + 4]
            + 3 * (int32_t)r0[i + 5];
        row[i] = align6_first_requantise(acc);
    }
}

/* acc / 2^7, rounded to nearest, ties toward plus infinity (acc started at one half), held
 * to 0 to 255. acc is -8096 to 40864. */
static uint8_t align6_second_requantise(int32_t acc)
{
    const int32_t code = ((acc + 8192) >> 7) - 64;

    if (code < 0) {
        return 0;
    }
    if (code > 255) {
        return 255;
    }
    return (uint8_t)code;
}

/* The second pass: one output row. */
static void align6_row(const align6_word *ring, size_t pitch, uint32_t e, size_t count,
    uint8_t *ALIGN6_RESTRICT dst)
{
    const align6_word *const r0 = ring + (size_t)(e % 6) * pitch;
    const align6_word *const r1 = ring + (size_t)((e + 1) % 6) * pitch;
    const align6_word *const r2 = ring + (size_t)((e + 2) % 6) * pitch;
    const align6_word *const r3 = ring + (size_t)((e + 3) % 6) * pitch;
    const align6_word *const r4 = ring + (size_t)((e + 4) % 6) * pitch;
    const align6_word *const r5 = ring + (size_t)((e + 5) % 6) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        int32_t acc = 64;

        acc += 3 * r0[i];
        acc += -16 * r1[i];
        acc += 77 * r2[i];
        acc += 77 * r3[i];
        acc += -16 * r4[i];
        acc += 3 * r5[i];
        dst[i] = align6_second_requantise(acc);
    }
}

/* Load extended row e through the row behind the ring: the first pass takes it from there. */
static void align6_load(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, size_t pitch, size_t count, align6_word *scratch)
{
    align6_word *const line = scratch + 6 * pitch;

    align6_extend(src, src_stride, width, height, e, line);
    align6_first(line, count, scratch + (size_t)(e % 6) * pitch);
}

/* Tell the size of the output, and whether the size of the source is legal; 0 if it is not. */
static int align6_sizes(size_t width, size_t height, uint32_t *out_columns, uint32_t *out_rows)
{
    const int is_legal = width - 1 <= 65534 && height - 1 <= 65534;

    *out_columns = is_legal ? (uint32_t)width : 0;
    *out_rows = is_legal ? (uint32_t)height : 0;
    return is_legal;
}

void align6_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    uint32_t out_columns;
    uint32_t out_rows;
    const int is_legal = align6_sizes(width, height, &out_columns, &out_rows);

    *out_width = is_legal ? (size_t)out_columns : 0;
    *out_height = is_legal ? (size_t)out_rows : 0;
}

int align6_band(const uint8_t *ALIGN6_RESTRICT src, size_t src_stride,
    uint8_t *ALIGN6_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    align6_word *ALIGN6_RESTRICT scratch, size_t scratch_len)
{
    uint32_t out_columns;
    uint32_t out_rows;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return ALIGN6_BAD_POINTER;
    }
    if (!align6_sizes(width, height, &out_columns, &out_rows)
        || from > to || to > out_rows) {
        return ALIGN6_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_columns) {
        return ALIGN6_BAD_STRIDE;
    }
    if (from == to) {
        return ALIGN6_OK;
    }
    /* the width is extended in 32 bits, which size_t may not have */
    if (scratch_len / 7 < (uint32_t)width + 5) {
        return ALIGN6_BAD_SCRATCH;
    }
    pitch = width + 5;
    for (row = from; row < to; row++) {
        const uint32_t e = (uint32_t)row;

        if (next < e) {
            next = e;
        }
        for (; next < e + 6; next++) {
            align6_load(src, src_stride, width, height, next, pitch, out_columns, scratch);
        }
        align6_row(scratch, pitch, e, out_columns, dst + (row - from) * dst_stride);
    }
    return ALIGN6_OK;
}

int align6_frame(const uint8_t *ALIGN6_RESTRICT src, size_t src_stride,
    uint8_t *ALIGN6_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    align6_word *ALIGN6_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    align6_output_size(width, height, &out_width, &out_height);
    return align6_band(src, src_stride, dst, dst_stride, width, height, 0, out_height,
        scratch, scratch_len);
}
