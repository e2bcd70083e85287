/* sharpen.c - a two-dimensional filter in integer arithmetic
 *
 * 3x3 sharpening of the panel picture, video levels
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * f688876ce4a61ca45771a5e6d465c843249ba559622563465b2daae7ccac771f.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "sharpen.h"

#if SHARPEN_EDITION != 0x23fb6697
#error "these files were not emitted together"
#endif

/* Index of the pixel that position `at` of an axis reads: the nearest pixel of the edge. */
static int32_t sharpen_index(int32_t at, int32_t length)
{
    if (at < 0) {
        return 0;
    }
    return at < length ? at : length - 1;
}

/* The number that is summed for a code: held to 16 to 235, less the pedestal 16. */
static sharpen_word sharpen_number(uint8_t code)
{
    if (code < 16) {
        code = 16;
    }
    if (code > 235) {
        code = 235;
    }
    return (sharpen_word)((int32_t)code - 16);
}

/* Fill `row` with row e - 1 of the source, columns -1 to width, extended by the border. */
static void sharpen_load(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, sharpen_word *SHARPEN_RESTRICT row)
{
    const int32_t y = sharpen_index((int32_t)e - 1, (int32_t)height);
    const uint8_t *const line = src + (size_t)y * src_stride;
    const int32_t columns = 3 * ((int32_t)width + 2);
    int32_t x;

    for (x = 0; x < 3; x++) {
        row[x] = sharpen_number(line[x % 3]);
    }
    for (; x < 3 * ((int32_t)width + 1); x++) {
        row[x] = sharpen_number(line[x - 3]);
    }
    for (; x < columns; x++) {
        row[x] = sharpen_number(line[3 * ((int32_t)width - 1) + x % 3]);
    }
}

/* acc / 2^2, rounded to nearest, ties away from zero, plus the pedestal 16, held to 16 to
 * 235. acc is -876 to 1752. */
static uint8_t sharpen_requantise(int32_t acc)
{
    const int32_t code = (acc < 0 ? acc - 2 : acc + 2) / 4 + 16;

    if (code < 16) {
        return 16;
    }
    if (code > 235) {
        return 235;
    }
    return (uint8_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, rows -1 to 1, columns -1 to 1:
 *    0   -1    0
 *   -1    8   -1
 *    0   -1    0
 */
static void sharpen_row(const sharpen_word *ring, size_t pitch, uint32_t top, size_t count,
    uint8_t *SHARPEN_RESTRICT dst)
{
    const sharpen_word *const r0 = ring + (size_t)(top % 3) * pitch;
    const sharpen_word *const r1 = ring + (size_t)((top + 1) % 3) * pitch;
    const sharpen_word *const r2 = ring + (size_t)((top + 2) % 3) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* -876 to 1752 at the end, for legal codes */
        int32_t acc = 0;

        acc -= r0[i + 3];
        acc += -r1[i] + 8 * r1[i + 3] - r1[i + 6];
        acc -= r2[i + 3];
        dst[i] = sharpen_requantise(acc);
    }
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int sharpen_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    *out_width = 0;
    *out_height = 0;
    /* a size below the least wraps round */
    if (width - 16u > 1264u || height - 16u > 784u) {
        return 0;
    }
    *out_width = width;
    *out_height = height;
    return 1;
}

void sharpen_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)sharpen_sizes(width, height, out_width, out_height);
}

int sharpen_band(
    const uint8_t *SHARPEN_RESTRICT src, size_t src_stride,
    uint8_t *SHARPEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    sharpen_word *SHARPEN_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return SHARPEN_BAD_POINTER;
    }
    if (!sharpen_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return SHARPEN_BAD_SIZE;
    }
    if (src_stride / 3 < width || dst_stride / 3 < out_width) {
        return SHARPEN_BAD_STRIDE;
    }
    if (from == to) {
        return SHARPEN_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 9 < (uint32_t)width + 2) {
        return SHARPEN_BAD_SCRATCH;
    }
    pitch = 3 * (width + 2);
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 3; next++) {
            sharpen_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 3) * pitch);
        }
        sharpen_row(scratch, pitch, top, 3 * out_width, dst + (row - from) * dst_stride);
    }
    return SHARPEN_OK;
}

int sharpen_frame(
    const uint8_t *SHARPEN_RESTRICT src, size_t src_stride,
    uint8_t *SHARPEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    sharpen_word *SHARPEN_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    sharpen_output_size(width, height, &out_width, &out_height);
    return sharpen_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, scratch,
        scratch_len);
}
