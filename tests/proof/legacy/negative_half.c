/* Wrong: half is added and C's division cuts toward zero, so that a negative result is rounded the
 * other way at all but a few values. Only dark pixels beside bright ones give one. */
#include <stdint.h>

void second(const uint8_t *src, int16_t *dst, int width, int height)
{
    int n = width * height, x = 0;

    while (n-- > 0) {
        int left = x > 0 ? src[-1] : *src;
        int right = x < width - 1 ? src[1] : *src;
        int v = 60 * *src - 2 * left - 2 * right;

        *dst++ = (int16_t)((v + 32) / 64);
        src++;
        if (++x == width)
            x = 0;
    }
}
