/* seam.c - a two-dimensional filter in integer arithmetic
 *
 * Thin upright lines on the unrolled bottle, 16-bit saturating sum
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * cfa3a7d029d53fe0b6b4894359b6558f478ee24392532886eafb3850a3b259ff.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "seam.h"

#if SEAM_EDITION != 0x37cae782
#error "these files were not emitted together"
#endif

/* Index of the pixel that position `at` of an axis reads: the image again and again. */
static int32_t seam_index(int32_t at, int32_t length)
{
    const int32_t period = length;
    const int32_t rest = at % period;
    const int32_t phase = rest < 0 ? rest + period : rest;

    return phase;
}

/* Fill `row` with row e of the source, columns -4 to width + 3, extended by the border. */
static void seam_load(const uint8_t *src, size_t src_stride, size_t width, uint32_t e,
    seam_word *SEAM_RESTRICT row)
{
    const uint8_t *const line = src + (size_t)e * src_stride;
    const int32_t columns = (int32_t)width + 8;
    int32_t x;

    for (x = 0; x < 4; x++) {
        row[x] = line[seam_index(x - 4, (int32_t)width)];
    }
    for (; x < (int32_t)width + 4; x++) {
        row[x] = line[x - 4];
    }
    for (; x < columns; x++) {
        row[x] = line[seam_index(x - 4, (int32_t)width)];
    }
}

/* acc + product, held to -32768 to 32767: the accumulator saturates at every add. */
static int32_t seam_add(int32_t acc, int32_t product)
{
    const int32_t sum = acc + product;

    if (sum < -32768) {
        return -32768;
    }
    if (sum > 32767) {
        return 32767;
    }
    return sum;
}

/* acc / 2^8, rounded toward zero, held to -128 to 127. acc is -32768 to 32767, so that no
 * code leaves these limits. */
static int8_t seam_requantise(int32_t acc)
{
    const int32_t code = acc / 256;

    return (int8_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, row 0, columns -4 to 4:
 *   -43   -43   -43    86    86    86   -43   -43   -43
 */
static void seam_row(const seam_word *r0, size_t count, int8_t *SEAM_RESTRICT dst)
{
    size_t i;

    for (i = 0; i < count; i++) {
        /* -65790 to 65790 at the end; the register holds -32768 to 32767 of it, for legal
         * codes */
        int32_t acc = 0;

        acc = seam_add(acc, -43 * r0[i]);
        acc = seam_add(acc, -43 * r0[i + 1]);
        acc = seam_add(acc, -43 * r0[i + 2]);
        acc = seam_add(acc, 86 * r0[i + 3]);
        acc = seam_add(acc, 86 * r0[i + 4]);
        acc = seam_add(acc, 86 * r0[i + 5]);
        acc = seam_add(acc, -43 * r0[i + 6]);
        acc = seam_add(acc, -43 * r0[i + 7]);
        acc = seam_add(acc, -43 * r0[i + 8]);
        dst[i] = seam_requantise(acc);
    }
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int seam_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    *out_width = 0;
    *out_height = 0;
    /* a size below the least wraps round */
    if (width - 64u > 4032u || height - 1u > 65534u) {
        return 0;
    }
    *out_width = width;
    *out_height = height;
    return 1;
}

void seam_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)seam_sizes(width, height, out_width, out_height);
}

int seam_band(
    const uint8_t *SEAM_RESTRICT src, size_t src_stride,
    int8_t *SEAM_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    seam_word *SEAM_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return SEAM_BAD_POINTER;
    }
    if (!seam_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return SEAM_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return SEAM_BAD_STRIDE;
    }
    if (from == to) {
        return SEAM_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len < (uint32_t)width + 8) {
        return SEAM_BAD_SCRATCH;
    }
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        if (next < top) {
            next = top;
        }
        for (; next < top + 1; next++) {
            seam_load(src, src_stride, width, next, scratch);
        }
        seam_row(scratch, out_width, dst + (row - from) * dst_stride);
    }
    return SEAM_OK;
}

int seam_frame(
    const uint8_t *SEAM_RESTRICT src, size_t src_stride,
    int8_t *SEAM_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    seam_word *SEAM_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    seam_output_size(width, height, &out_width, &out_height);
    return seam_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, scratch,
        scratch_len);
}
