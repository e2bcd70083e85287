/* soften5.c - a two-dimensional filter in integer arithmetic
 *
 * 5x5 binomial, unity DC gain
 *
 * Written by guardbit 0.1.0 from a spec with SHA-256
 * 8055e6496651e9b5db860652b1f9e014c2f4edb9aa871d747e5a929b70a97d2f.
 * Change the spec and emit again rather than edit this file. It belongs to you, the owner of
 * the spec, under any terms you like; it comes without warranty.
 */
#include "soften5.h"

/* Index of the pixel that position `at` of an axis reads: the nearest edge pixel. */
static int32_t soften5_index(int32_t at, int32_t length)
{
    if (at < 0) {
        return 0;
    }
    return at < length ? at : length - 1;
}

/* Fill `row` with row e - 2 of the source, columns -2 to width + 1, extended by the border. */
static void soften5_load(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, soften5_word *SOFTEN5_RESTRICT row)
{
    const int32_t y = soften5_index((int32_t)e - 2, (int32_t)height);
    const uint8_t *const line = src + (size_t)y * src_stride;
    const int32_t columns = (int32_t)width + 4;
    int32_t x;

    for (x = 0; x < 2; x++) {
        row[x] = line[soften5_index(x - 2, (int32_t)width)];
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = line[x - 2];
    }
    for (; x < columns; x++) {
        row[x] = line[soften5_index(x - 2, (int32_t)width)];
    }
}

/* acc / 2^8, rounded to nearest, ties toward plus infinity, held to 0 to 255. acc is 0 to
 * 65280, so that no code leaves these limits. */
static uint8_t soften5_requantise(int32_t acc)
{
    const int32_t code = (acc + 128) >> 8;

    return (uint8_t)code;
}

/* Compute one output row from the ring; e is the extended row that its top tap reads. */
static void soften5_row(const soften5_word *ring, size_t pitch, uint32_t e, size_t count,
    uint8_t *SOFTEN5_RESTRICT dst)
{
    const soften5_word *const r0 = ring + (size_t)(e % 5) * pitch;
    const soften5_word *const r1 = ring + (size_t)((e + 1) % 5) * pitch;
    const soften5_word *const r2 = ring + (size_t)((e + 2) % 5) * pitch;
    const soften5_word *const r3 = ring + (size_t)((e + 3) % 5) * pitch;
    const soften5_word *const r4 = ring + (size_t)((e + 4) % 5) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        int32_t acc = 0;

        acc += r0[i] + 4 * r0[i + 1] + 6 * r0[i + 2] + 4 * r0[i + 3] + r0[i + 4];
        acc += 4 * r1[i] + 16 * r1[i + 1] + 24 * r1[i + 2] + 16 * r1[i + 3]
            + 4 * r1[i + 4];
        acc += 6 * r2[i] + 24 * r2[i + 1] + 36 * r2[i + 2] + 24 * r2[i + 3]
            + 6 * r2[i + 4];
        acc += 4 * r3[i] + 16 * r3[i + 1] + 24 * r3[i + 2] + 16 * r3[i + 3]
            + 4 * r3[i + 4];
        acc += r4[i] + 4 * r4[i + 1] + 6 * r4[i + 2] + 4 * r4[i + 3] + r4[i + 4];
        dst[i] = soften5_requantise(acc);
    }
}

/* Tell the size of the output, and whether the size of the source is legal; 0 if it is not. */
static int soften5_sizes(size_t width, size_t height, uint32_t *out_columns, uint32_t *out_rows)
{
    const int is_legal = width - 1 <= 65534 && height - 1 <= 65534;

    *out_columns = is_legal ? (uint32_t)width : 0;
    *out_rows = is_legal ? (uint32_t)height : 0;
    return is_legal;
}

void soften5_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    uint32_t out_columns;
    uint32_t out_rows;
    const int is_legal = soften5_sizes(width, height, &out_columns, &out_rows);

    *out_width = is_legal ? (size_t)out_columns : 0;
    *out_height = is_legal ? (size_t)out_rows : 0;
}

int soften5_band(const uint8_t *SOFTEN5_RESTRICT src, size_t src_stride,
    uint8_t *SOFTEN5_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    soften5_word *SOFTEN5_RESTRICT scratch, size_t scratch_len)
{
    uint32_t out_columns;
    uint32_t out_rows;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return SOFTEN5_BAD_POINTER;
    }
    if (!soften5_sizes(width, height, &out_columns, &out_rows)
        || from > to || to > out_rows) {
        return SOFTEN5_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_columns) {
        return SOFTEN5_BAD_STRIDE;
    }
    if (from == to) {
        return SOFTEN5_OK;
    }
    /* the width is extended in 32 bits, which size_t may not have */
    if (scratch_len / 5 < (uint32_t)width + 4) {
        return SOFTEN5_BAD_SCRATCH;
    }
    pitch = width + 4;
    for (row = from; row < to; row++) {
        const uint32_t e = (uint32_t)row;

        if (next < e) {
            next = e;
        }
        for (; next < e + 5; next++) {
            soften5_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 5) * pitch);
        }
        soften5_row(scratch, pitch, e, out_columns, dst + (row - from) * dst_stride);
    }
    return SOFTEN5_OK;
}

int soften5_frame(const uint8_t *SOFTEN5_RESTRICT src, size_t src_stride,
    uint8_t *SOFTEN5_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    soften5_word *SOFTEN5_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    soften5_output_size(width, height, &out_width, &out_height);
    return soften5_band(src, src_stride, dst, dst_stride, width, height, 0, out_height,
        scratch, scratch_len);
}
