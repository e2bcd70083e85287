/* Crisper print: five taps, mirrored at the edge. Images are described by structs. */
typedef struct {
    const unsigned char *data;
    int width, height, stride;
} image;

static int mirror(int i, int n)
{
    while (i < 0 || i >= n) {
        if (i < 0)
            i = -1 - i;
        if (i >= n)
            i = 2 * n - 1 - i;
    }
    return i;
}

static int get(const image *im, int x, int y)
{
    return im->data[mirror(y, im->height) * im->stride + mirror(x, im->width)];
}

void sharpen(const unsigned char *src, int src_stride, unsigned char *dst, int dst_stride,
             int width, int height)
{
    image im;
    int x, y;

    im.data = src;
    im.width = width;
    im.height = height;
    im.stride = src_stride;
    for (y = 0; y != height; ++y) {
        unsigned char *to = dst + y * dst_stride;

        for (x = 0; x != width; ++x) {
            int v = 8 * get(&im, x, y);

            v -= get(&im, x - 1, y) + get(&im, x + 1, y);
            v -= get(&im, x, y - 1) + get(&im, x, y + 1);
            v = (v + 2) >> 2;
            to[x] = v < 0 ? 0 : v > 255 ? 255 : (unsigned char)v;
        }
    }
}
