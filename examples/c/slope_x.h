/* slope_x.h - a two-dimensional filter in integer arithmetic
 *
 * Horizontal slope per pixel, exact, three fraction bits
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 3597e140c3f9e4adedc3835985fe8c61d62921b308b8a4e41bc834fafedcaa91.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef SLOPE_X_H
#define SLOPE_X_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define SLOPE_X_RESTRICT
extern "C" {
#else
#define SLOPE_X_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define SLOPE_X_EDITION 0xf1e4dd0d

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          8-bit unsigned, codes 0 to 255
 * border          none is needed: every tap reads inside the image
 * accumulator     11 bits, two's complement, of which 11 are needed; cannot overflow;
 *                 -1020 to 1020 at the end, for legal codes
 * requantiser     acc, which legal sources keep within -32768 to 32767
 * output          16-bit signed, codes -32768 to 32767, one step is 2^-3;
 *                 positions whose every tap reads inside the image
 * error           0 to 0 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef uint8_t slope_x_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define SLOPE_X_SCRATCH_LEN(width) ((size_t)3 * (size_t)(width))

enum slope_x_status {
    SLOPE_X_OK = 0,
    SLOPE_X_BAD_POINTER, /* src, dst or scratch is null */
    SLOPE_X_BAD_SIZE,    /* width, height or the range of rows is not legal */
    SLOPE_X_BAD_STRIDE,  /* a stride is less than a row */
    SLOPE_X_BAD_SCRATCH, /* scratch_len is too small */
    SLOPE_X_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 1 to 65535
 * height       rows of the source, 1 to 65535
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least SLOPE_X_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. slope_x_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is SLOPE_X_OK.
 *
 * Returns an enum slope_x_status.
 */
int slope_x_frame(
    const uint8_t *SLOPE_X_RESTRICT src, size_t src_stride,
    int16_t *SLOPE_X_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    slope_x_word *SLOPE_X_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum slope_x_status.
 */
int slope_x_band(
    const uint8_t *SLOPE_X_RESTRICT src, size_t src_stride,
    int16_t *SLOPE_X_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    slope_x_word *SLOPE_X_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void slope_x_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
