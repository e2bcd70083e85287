/* Wrong: the measured kernel is laid on the picture as it is, not turned round. It is so nearly
 * symmetric that most pictures come out the same. */
#include <stdint.h>

static const int16_t psf[3][3] = {
    { 14, 30, 14 },
    { 30, 81, 29 },
    { 14, 30, 14 },
};

void defocus(const uint8_t *src, uint8_t *dst, int width, int height)
{
    int y, x, j, i;

    for (y = 0; y < height; y++) {
        for (x = 0; x < width; x++) {
            int32_t sum = 128;

            for (j = 0; j < 3; j++) {
                for (i = 0; i < 3; i++) {
                    int yy = y + j - 1, xx = x + i - 1;

                    yy = yy < 0 ? 0 : yy >= height ? height - 1 : yy;
                    xx = xx < 0 ? 0 : xx >= width ? width - 1 : xx;
                    sum += psf[j][i] * src[yy * width + xx];
                }
            }
            dst[y * width + x] = (uint8_t)(sum >> 8);
        }
    }
}
