/* mean25.c - a two-dimensional filter in integer arithmetic
 *
 * Mean of 5x5 pixels, divided by exactly 25
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 1c90915922cd9e0bd6d3185d831b610a834a98897b9302dab22abd2cdff93bf8.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "mean25.h"

#if MEAN25_EDITION != 0x6bc72830
#error "these files were not emitted together"
#endif

/* Fill `row` with row e - 2 of the source, columns -2 to width + 1, extended by the border. */
static void mean25_load(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, mean25_word *MEAN25_RESTRICT row)
{
    const int32_t y = (int32_t)e - 2;
    const uint8_t *line;
    const int32_t columns = (int32_t)width + 4;
    int32_t x;

    if (y < 0 || y >= (int32_t)height) {
        for (x = 0; x < columns; x++) {
            row[x] = 240;
        }
        return;
    }
    line = src + (size_t)y * src_stride;
    for (x = 0; x < 2; x++) {
        row[x] = 240;
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = line[x - 2];
    }
    for (; x < columns; x++) {
        row[x] = 240;
    }
}

/* acc / 25, rounded to nearest, ties toward plus infinity, held to 0 to 255. acc is 0 to
 * 6375, so that no code leaves these limits. */
static uint8_t mean25_requantise(int32_t acc)
{
    const int32_t code = (acc + 12) / 25;

    return (uint8_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, rows -2 to 2, columns -2 to 2:
 *   1   1   1   1   1
 *   1   1   1   1   1
 *   1   1   1   1   1
 *   1   1   1   1   1
 *   1   1   1   1   1
 */
static void mean25_row(const mean25_word *ring, size_t pitch, uint32_t top, size_t count,
    uint8_t *MEAN25_RESTRICT dst)
{
    const mean25_word *const r0 = ring + (size_t)(top % 5) * pitch;
    const mean25_word *const r1 = ring + (size_t)((top + 1) % 5) * pitch;
    const mean25_word *const r2 = ring + (size_t)((top + 2) % 5) * pitch;
    const mean25_word *const r3 = ring + (size_t)((top + 3) % 5) * pitch;
    const mean25_word *const r4 = ring + (size_t)((top + 4) % 5) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* 0 to 6375 at the end, for legal codes */
        int32_t acc = 0;

        acc += r0[i] + r0[i + 1] + r0[i + 2] + r0[i + 3] + r0[i + 4];
        acc += r1[i] + r1[i + 1] + r1[i + 2] + r1[i + 3] + r1[i + 4];
        acc += r2[i] + r2[i + 1] + r2[i + 2] + r2[i + 3] + r2[i + 4];
        acc += r3[i] + r3[i + 1] + r3[i + 2] + r3[i + 3] + r3[i + 4];
        acc += r4[i] + r4[i + 1] + r4[i + 2] + r4[i + 3] + r4[i + 4];
        dst[i] = mean25_requantise(acc);
    }
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int mean25_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
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

void mean25_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)mean25_sizes(width, height, out_width, out_height);
}

int mean25_band(
    const uint8_t *MEAN25_RESTRICT src, size_t src_stride,
    uint8_t *MEAN25_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    mean25_word *MEAN25_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return MEAN25_BAD_POINTER;
    }
    if (!mean25_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return MEAN25_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return MEAN25_BAD_STRIDE;
    }
    if (from == to) {
        return MEAN25_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 5 < (uint32_t)width + 4) {
        return MEAN25_BAD_SCRATCH;
    }
    pitch = width + 4;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 5; next++) {
            mean25_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 5) * pitch);
        }
        mean25_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return MEAN25_OK;
}

int mean25_frame(
    const uint8_t *MEAN25_RESTRICT src, size_t src_stride,
    uint8_t *MEAN25_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    mean25_word *MEAN25_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    mean25_output_size(width, height, &out_width, &out_height);
    return mean25_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, scratch,
        scratch_len);
}
