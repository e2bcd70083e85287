/* soften5.h - a two-dimensional filter in integer arithmetic
 *
 * 5x5 binomial, unity DC gain
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 8055e6496651e9b5db860652b1f9e014c2f4edb9aa871d747e5a929b70a97d2f.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef SOFTEN5_H
#define SOFTEN5_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define SOFTEN5_RESTRICT
extern "C" {
#else
#define SOFTEN5_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define SOFTEN5_EDITION 0x6f5b6861

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          8-bit unsigned, codes 0 to 255
 * border          outside the image: the nearest pixel of the edge
 * accumulator     20 bits, two's complement, of which 17 are needed; cannot overflow;
 *                 0 to 65280 at the end, for legal codes
 * requantiser     acc / 2^8, rounded to nearest, ties toward plus infinity, held to 0 to 255
 * output          8-bit unsigned, codes 0 to 255;
 *                 one for each source pixel
 * error           -0.4961 to 0.5 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef uint8_t soften5_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define SOFTEN5_SCRATCH_LEN(width) ((size_t)5 * ((size_t)(width) + 4))

enum soften5_status {
    SOFTEN5_OK = 0,
    SOFTEN5_BAD_POINTER, /* src, dst or scratch is null */
    SOFTEN5_BAD_SIZE,    /* width, height or the range of rows is not legal */
    SOFTEN5_BAD_STRIDE,  /* a stride is less than a row */
    SOFTEN5_BAD_SCRATCH, /* scratch_len is too small */
    SOFTEN5_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 1 to 65535
 * height       rows of the source, 1 to 65535
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least SOFTEN5_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. soften5_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is SOFTEN5_OK.
 *
 * Returns an enum soften5_status.
 */
int soften5_frame(
    const uint8_t *SOFTEN5_RESTRICT src, size_t src_stride,
    uint8_t *SOFTEN5_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    soften5_word *SOFTEN5_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum soften5_status.
 */
int soften5_band(
    const uint8_t *SOFTEN5_RESTRICT src, size_t src_stride,
    uint8_t *SOFTEN5_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    soften5_word *SOFTEN5_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void soften5_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
