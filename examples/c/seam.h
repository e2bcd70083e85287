/* seam.h - a two-dimensional filter in integer arithmetic
 *
 * Thin upright lines on the unrolled bottle, 16-bit saturating sum
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * cfa3a7d029d53fe0b6b4894359b6558f478ee24392532886eafb3850a3b259ff.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef SEAM_H
#define SEAM_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define SEAM_RESTRICT
extern "C" {
#else
#define SEAM_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define SEAM_EDITION 0x37cae782

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          8-bit unsigned, codes 0 to 255
 * border          outside the image: the image again and again
 * accumulator     16 bits, two's complement, of which 18 are needed; saturates at every add;
 *                 -65790 to 65790 at the end; the register holds -32768 to 32767 of it, for
 *                 legal codes
 * requantiser     acc / 2^8, rounded toward zero, held to -128 to 127
 * output          8-bit signed, codes -128 to 127;
 *                 one for each source pixel
 * error           -0.8334 to 0.8334 LSB of the output code against the ideal filter,
 *                 for sources with which no sum leaves its register and no output wraps
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef uint8_t seam_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define SEAM_SCRATCH_LEN(width) (((size_t)(width) + 8))

enum seam_status {
    SEAM_OK = 0,
    SEAM_BAD_POINTER, /* src, dst or scratch is null */
    SEAM_BAD_SIZE,    /* width, height or the range of rows is not legal */
    SEAM_BAD_STRIDE,  /* a stride is less than a row */
    SEAM_BAD_SCRATCH, /* scratch_len is too small */
    SEAM_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 64 to 4096
 * height       rows of the source, 1 to 65535
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least SEAM_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. seam_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is SEAM_OK.
 *
 * Returns an enum seam_status.
 */
int seam_frame(
    const uint8_t *SEAM_RESTRICT src, size_t src_stride,
    int8_t *SEAM_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    seam_word *SEAM_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum seam_status.
 */
int seam_band(
    const uint8_t *SEAM_RESTRICT src, size_t src_stride,
    int8_t *SEAM_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    seam_word *SEAM_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void seam_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
