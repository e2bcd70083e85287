/* mosaic_green.c - a two-dimensional filter in integer arithmetic
 *
 * Green pixels of the red rows, smoothed among themselves, half size
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 5a59fc62c55c15c11b3898a33fed589f6d6877e47145ef60fc9d50c0d8f26b44.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "mosaic_green.h"

#if MOSAIC_GREEN_EDITION != 0x0c957d06
#error "these files were not emitted together"
#endif

/* Index of the pixel that position `at` of an axis reads: mirrored, with the pixel of the
 * edge once. */
static int32_t mosaic_green_fold(int32_t at, int32_t length)
{
    const int32_t period = length > 1 ? 2 * length - 2 : 1;
    const int32_t rest = at % period;
    const int32_t phase = rest < 0 ? rest + period : rest;

    return phase < length ? phase : period - phase;
}

/* The same among the pixels `spacing` apart from `at`, so that the sites of a mosaic stay apart. */
static int32_t mosaic_green_index(int32_t at, int32_t length, int32_t spacing)
{
    const int32_t rest = at % spacing;
    const int32_t site = rest < 0 ? rest + spacing : rest;
    const int32_t count = (length - site + spacing - 1) / spacing;

    return site + spacing * mosaic_green_fold((at - site) / spacing, count);
}

/* The number that is summed for a code: held to 0 to 1023, less the pedestal 64. */
static mosaic_green_word mosaic_green_number(uint16_t code)
{
    if (code > 1023) {
        code = 1023;
    }
    return (mosaic_green_word)((int32_t)code - 64);
}

/* Fill `row` with row e - 2 of the source, columns -2 to width + 1, extended by the border. */
static void mosaic_green_load(const uint16_t *src, size_t src_stride, size_t width,
    size_t height, uint32_t e, mosaic_green_word *MOSAIC_GREEN_RESTRICT row)
{
    const int32_t y = mosaic_green_index((int32_t)e - 2, (int32_t)height, 2);
    const uint16_t *const line = src + (size_t)y * src_stride;
    const int32_t columns = (int32_t)width + 4;
    int32_t x;

    for (x = 0; x < 2; x++) {
        row[x] = mosaic_green_number(line[mosaic_green_index(x - 2, (int32_t)width, 2)]);
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = mosaic_green_number(line[x - 2]);
    }
    for (; x < columns; x++) {
        row[x] = mosaic_green_number(line[mosaic_green_index(x - 2, (int32_t)width, 2)]);
    }
}

/* acc / 2^2, rounded to nearest, ties toward plus infinity, plus the pedestal 256, held to 0
 * to 4095. acc is -1024 to 15344, so that no code leaves these limits. */
static uint16_t mosaic_green_requantise(int32_t acc)
{
    const int32_t code = (acc + 1026) >> 2;

    return (uint16_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, rows -2 to 2 by 2, columns -2 to 2 by 2:
 *   1   2   1
 *   2   4   2
 *   1   2   1
 */
static void mosaic_green_row(const mosaic_green_word *ring, size_t pitch, uint32_t top,
    size_t count, uint16_t *MOSAIC_GREEN_RESTRICT dst)
{
    const mosaic_green_word *const r0 = ring + (size_t)(top % 5) * pitch;
    const mosaic_green_word *const r2 = ring + (size_t)((top + 2) % 5) * pitch;
    const mosaic_green_word *const r4 = ring + (size_t)((top + 4) % 5) * pitch;
    size_t x;

    for (x = 0; x < count; x++) {
        const size_t i = 2 * x;
        /* -1024 to 15344 at the end, for legal codes */
        int32_t acc = 0;

        acc += r0[i + 1] + 2 * r0[i + 3] + r0[i + 5];
        acc += 2 * r2[i + 1] + 4 * r2[i + 3] + 2 * r2[i + 5];
        acc += r4[i + 1] + 2 * r4[i + 3] + r4[i + 5];
        dst[x] = mosaic_green_requantise(acc);
    }
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int mosaic_green_sizes(size_t width, size_t height, size_t *out_width,
    size_t *out_height)
{
    *out_width = 0;
    *out_height = 0;
    /* a size below the least wraps round */
    if (width - 4u > 1276u || height - 4u > 956u) {
        return 0;
    }
    *out_width = (size_t)((uint32_t)width / 2);
    *out_height = (size_t)(((uint32_t)height + 1) / 2);
    return 1;
}

void mosaic_green_output_size(size_t width, size_t height, size_t *out_width,
    size_t *out_height)
{
    (void)mosaic_green_sizes(width, height, out_width, out_height);
}

int mosaic_green_band(
    const uint16_t *MOSAIC_GREEN_RESTRICT src, size_t src_stride,
    uint16_t *MOSAIC_GREEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    mosaic_green_word *MOSAIC_GREEN_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return MOSAIC_GREEN_BAD_POINTER;
    }
    if (!mosaic_green_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return MOSAIC_GREEN_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return MOSAIC_GREEN_BAD_STRIDE;
    }
    if (from == to) {
        return MOSAIC_GREEN_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 5 < (uint32_t)width + 4) {
        return MOSAIC_GREEN_BAD_SCRATCH;
    }
    pitch = width + 4;
    for (row = from; row < to; row++) {
        const uint32_t top = 2 * (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 5; next++) {
            mosaic_green_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 5) * pitch);
        }
        mosaic_green_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return MOSAIC_GREEN_OK;
}

int mosaic_green_frame(
    const uint16_t *MOSAIC_GREEN_RESTRICT src, size_t src_stride,
    uint16_t *MOSAIC_GREEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    mosaic_green_word *MOSAIC_GREEN_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    mosaic_green_output_size(width, height, &out_width, &out_height);
    return mosaic_green_band(src, src_stride, dst, dst_stride, width, height, 0, out_height,
        scratch, scratch_len);
}
