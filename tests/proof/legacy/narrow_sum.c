/* Wrong: the sum is kept in 16 bits. It overflows only where nearly all pixels are at their ends. */
#include <stdint.h>

void crisp(const uint8_t *src, uint8_t *dst, int width, int height)
{
    int y, x;

    for (y = 0; y < height; y++)
        for (x = 0; x < width; x++) {
            const uint8_t *p = src + y * width;
            int l = x > 1 ? x - 2 : 0, m = x > 0 ? x - 1 : 0;
            int r = x + 1 < width ? x + 1 : width - 1, s = x + 2 < width ? x + 2 : width - 1;
            int16_t sum = 0;

            sum = (int16_t)(sum + 34 * p[m] + 34 * p[r]);
            sum = (int16_t)(sum + 70 * p[x]);
            sum = (int16_t)(sum - 5 * p[l] - 5 * p[s] + 64);
            dst[y * width + x] = sum < 0 ? 0 : (sum >> 7) > 255 ? 255 : (uint8_t)(sum >> 7);
        }
}
