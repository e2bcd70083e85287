/* soften5.c - a two-dimensional filter in integer arithmetic
 *
 * 5x5 binomial, unity DC gain
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 8055e6496651e9b5db860652b1f9e014c2f4edb9aa871d747e5a929b70a97d2f.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "soften5.h"

#if SOFTEN5_EDITION != 0x6f5b6861
#error "these files were not emitted together"
#endif

/* Index of the pixel that position `at` of an axis reads: the nearest pixel of the edge. */
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
        row[x] = line[0];
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = line[x - 2];
    }
    for (; x < columns; x++) {
        row[x] = line[width - 1];
    }
}

/* acc / 2^8, rounded to nearest, ties toward plus infinity, held to 0 to 255. acc is 0 to
 * 65280, so that no code leaves these limits. */
static uint8_t soften5_requantise(int32_t acc)
{
    const int32_t code = (acc + 128) >> 8;

    return (uint8_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, rows -2 to 2, columns -2 to 2:
 *    1    4    6    4    1
 *    4   16   24   16    4
 *    6   24   36   24    6
 *    4   16   24   16    4
 *    1    4    6    4    1
 */
static void soften5_row(const soften5_word *ring, size_t pitch, uint32_t top, size_t count,
    uint8_t *SOFTEN5_RESTRICT dst)
{
    const soften5_word *const r0 = ring + (size_t)(top % 5) * pitch;
    const soften5_word *const r1 = ring + (size_t)((top + 1) % 5) * pitch;
    const soften5_word *const r2 = ring + (size_t)((top + 2) % 5) * pitch;
    const soften5_word *const r3 = ring + (size_t)((top + 3) % 5) * pitch;
    const soften5_word *const r4 = ring + (size_t)((top + 4) % 5) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* 0 to 65280 at the end, for legal codes */
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

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int soften5_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    *out_width = 0;
    *out_height = 0;
    /* a size below the least wraps round */
    if (width - 1u > 65534u || height - 1u > 65534u) {
        return 0;
    }
    *out_width = width;
    *out_height = height;
    return 1;
}

void soften5_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)soften5_sizes(width, height, out_width, out_height);
}

int soften5_band(
    const uint8_t *SOFTEN5_RESTRICT src, size_t src_stride,
    uint8_t *SOFTEN5_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    soften5_word *SOFTEN5_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return SOFTEN5_BAD_POINTER;
    }
    if (!soften5_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return SOFTEN5_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return SOFTEN5_BAD_STRIDE;
    }
    if (from == to) {
        return SOFTEN5_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 5 < (uint32_t)width + 4) {
        return SOFTEN5_BAD_SCRATCH;
    }
    pitch = width + 4;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 5; next++) {
            soften5_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 5) * pitch);
        }
        soften5_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return SOFTEN5_OK;
}

int soften5_frame(
    const uint8_t *SOFTEN5_RESTRICT src, size_t src_stride,
    uint8_t *SOFTEN5_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    soften5_word *SOFTEN5_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    soften5_output_size(width, height, &out_width, &out_height);
    return soften5_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, scratch,
        scratch_len);
}
