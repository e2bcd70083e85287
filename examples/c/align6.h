/* align6.h - a two-dimensional filter in integer arithmetic
 *
 * Half-pixel shift, six taps, two passes with 8 bits in between
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 2377bc762dc7a96b0fa82494f6eb226793cdee3367bdff59a4e7e42d6930fc24.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef ALIGN6_H
#define ALIGN6_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define ALIGN6_RESTRICT
extern "C" {
#else
#define ALIGN6_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define ALIGN6_EDITION 0xd052ddc6

/*
 * correlation: y[n1, n2] = sum h[k1, k2] * x[n1 + k1, n2 + k2]
 *
 * source          8-bit unsigned, codes 0 to 255
 * border          outside the image: the nearest pixel of the edge
 * accumulator 1   17 bits, two's complement, of which 17 are needed; cannot overflow;
 *                 -8096 to 40864 at the end, for legal codes
 * requantiser 1   acc / 2^7, rounded to nearest, ties toward plus infinity (acc started at one
 *                 half), held to 0 to 255
 * accumulator 2   17 bits, two's complement, of which 17 are needed; cannot overflow;
 *                 -8096 to 40864 at the end, for legal codes
 * requantiser 2   acc / 2^7, rounded to nearest, ties toward plus infinity (acc started at one
 *                 half), held to 0 to 255
 * output          8-bit unsigned, codes 0 to 255;
 *                 one for each source pixel
 * error           -58.0637 to 58.0762 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef uint8_t align6_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define ALIGN6_SCRATCH_LEN(width) ((size_t)7 * ((size_t)(width) + 5))

enum align6_status {
    ALIGN6_OK = 0,
    ALIGN6_BAD_POINTER, /* src, dst or scratch is null */
    ALIGN6_BAD_SIZE,    /* width, height or the range of rows is not legal */
    ALIGN6_BAD_STRIDE,  /* a stride is less than a row */
    ALIGN6_BAD_SCRATCH, /* scratch_len is too small */
    ALIGN6_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 1 to 65535
 * height       rows of the source, 1 to 65535
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least ALIGN6_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. align6_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is ALIGN6_OK.
 *
 * Returns an enum align6_status.
 */
int align6_frame(
    const uint8_t *ALIGN6_RESTRICT src, size_t src_stride,
    uint8_t *ALIGN6_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    align6_word *ALIGN6_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum align6_status.
 */
int align6_band(
    const uint8_t *ALIGN6_RESTRICT src, size_t src_stride,
    uint8_t *ALIGN6_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    align6_word *ALIGN6_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void align6_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
