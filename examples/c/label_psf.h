/* label_psf.h - a two-dimensional filter in integer arithmetic
 *
 * Defocus of the label camera, as measured on the bench
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * cef47fe35187c0c690974c1d57e4edd74b81c44e34fa98a8ad9dfd1ceb77114a.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef LABEL_PSF_H
#define LABEL_PSF_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define LABEL_PSF_RESTRICT
extern "C" {
#else
#define LABEL_PSF_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define LABEL_PSF_EDITION 0x453e15c6

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          8-bit unsigned, codes 0 to 255
 * border          outside the image: the code 255
 * accumulator     16 bits, unsigned, of which 16 are needed; cannot overflow;
 *                 128 to 65408 at the end, for legal codes
 * requantiser     acc / 2^8, rounded to nearest, ties toward plus infinity (acc started at one
 *                 half), held to 0 to 255
 * output          8-bit unsigned, codes 0 to 255;
 *                 one for each source pixel
 * error           -3.4801 to 3.484 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef uint8_t label_psf_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define LABEL_PSF_SCRATCH_LEN(width) ((size_t)5 * ((size_t)(width) + 4))

enum label_psf_status {
    LABEL_PSF_OK = 0,
    LABEL_PSF_BAD_POINTER, /* src, dst or scratch is null */
    LABEL_PSF_BAD_SIZE,    /* width, height or the range of rows is not legal */
    LABEL_PSF_BAD_STRIDE,  /* a stride is less than a row */
    LABEL_PSF_BAD_SCRATCH, /* scratch_len is too small */
    LABEL_PSF_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 1 to 65535
 * height       rows of the source, 1 to 65535
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least LABEL_PSF_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. label_psf_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is LABEL_PSF_OK.
 *
 * Returns an enum label_psf_status.
 */
int label_psf_frame(
    const uint8_t *LABEL_PSF_RESTRICT src, size_t src_stride,
    uint8_t *LABEL_PSF_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    label_psf_word *LABEL_PSF_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum label_psf_status.
 */
int label_psf_band(
    const uint8_t *LABEL_PSF_RESTRICT src, size_t src_stride,
    uint8_t *LABEL_PSF_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    label_psf_word *LABEL_PSF_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void label_psf_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
