/* label_psf.c - a two-dimensional filter in integer arithmetic
 *
 * Defocus of the label camera, as measured on the bench
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * cef47fe35187c0c690974c1d57e4edd74b81c44e34fa98a8ad9dfd1ceb77114a.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "label_psf.h"

#if LABEL_PSF_EDITION != 0x453e15c6
#error "these files were not emitted together"
#endif

/* Fill `row` with row e - 2 of the source, columns -2 to width + 1, extended by the border. */
static void label_psf_load(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, label_psf_word *LABEL_PSF_RESTRICT row)
{
    const int32_t y = (int32_t)e - 2;
    const uint8_t *line;
    const int32_t columns = (int32_t)width + 4;
    int32_t x;

    if (y < 0 || y >= (int32_t)height) {
        for (x = 0; x < columns; x++) {
            row[x] = 255;
        }
        return;
    }
    line = src + (size_t)y * src_stride;
    for (x = 0; x < 2; x++) {
        row[x] = 255;
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = line[x - 2];
    }
    for (; x < columns; x++) {
        row[x] = 255;
    }
}

/* acc / 2^8, rounded to nearest, ties toward plus infinity (acc started at one half), held
 * to 0 to 255. acc is 128 to 65408, so that no code leaves these limits. */
static uint8_t label_psf_requantise(int32_t acc)
{
    const int32_t code = acc >> 8;

    return (uint8_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, rows -2 to 2, columns -2 to 2:
 *    1    9   12    9    1
 *   10   15   14   13    8
 *   14   15   14   13   11
 *   11   15   14   14    9
 *    1   10   13    9    1
 */
static void label_psf_row(const label_psf_word *ring, size_t pitch, uint32_t top, size_t count,
    uint8_t *LABEL_PSF_RESTRICT dst)
{
    const label_psf_word *const r0 = ring + (size_t)(top % 5) * pitch;
    const label_psf_word *const r1 = ring + (size_t)((top + 1) % 5) * pitch;
    const label_psf_word *const r2 = ring + (size_t)((top + 2) % 5) * pitch;
    const label_psf_word *const r3 = ring + (size_t)((top + 3) % 5) * pitch;
    const label_psf_word *const r4 = ring + (size_t)((top + 4) % 5) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* 128 to 65408 at the end, for legal codes */
        int32_t acc = 128;

        acc += r0[i] + 9 * r0[i + 1] + 12 * r0[i + 2] + 9 * r0[i + 3] + r0[i + 4];
        acc += 10 * r1[i] + 15 * r1[i + 1] + 14 * r1[i + 2] + 13 * r1[i + 3]
            + 8 * r1[i + 4];
        acc += 14 * r2[i] + 15 * r2[i + 1] + 14 * r2[i + 2] + 13 * r2[i + 3]
            + 11 * r2[i + 4];
        acc += 11 * r3[i] + 15 * r3[i + 1] + 14 * r3[i + 2] + 14 * r3[i + 3]
            + 9 * r3[i + 4];
        acc += r4[i] + 10 * r4[i + 1] + 13 * r4[i + 2] + 9 * r4[i + 3] + r4[i + 4];
        dst[i] = label_psf_requantise(acc);
    }
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int label_psf_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
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

void label_psf_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)label_psf_sizes(width, height, out_width, out_height);
}

int label_psf_band(
    const uint8_t *LABEL_PSF_RESTRICT src, size_t src_stride,
    uint8_t *LABEL_PSF_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    label_psf_word *LABEL_PSF_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return LABEL_PSF_BAD_POINTER;
    }
    if (!label_psf_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return LABEL_PSF_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return LABEL_PSF_BAD_STRIDE;
    }
    if (from == to) {
        return LABEL_PSF_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 5 < (uint32_t)width + 4) {
        return LABEL_PSF_BAD_SCRATCH;
    }
    pitch = width + 4;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 5; next++) {
            label_psf_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 5) * pitch);
        }
        label_psf_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return LABEL_PSF_OK;
}

int label_psf_frame(
    const uint8_t *LABEL_PSF_RESTRICT src, size_t src_stride,
    uint8_t *LABEL_PSF_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    label_psf_word *LABEL_PSF_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    label_psf_output_size(width, height, &out_width, &out_height);
    return label_psf_band(src, src_stride, dst, dst_stride, width, height, 0, out_height,
        scratch, scratch_len);
}
