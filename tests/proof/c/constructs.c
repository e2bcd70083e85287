/* One function for each construct that the machine accepts: a is -128 to 127, b is 0 to 255, and
 * each is defined for all of them. */
#include <limits.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <string.h>

#define TWICE(x) ((x) + (x))
#define CLAMPED(v, lo, hi) ((v) < (lo) ? (lo) : (v) > (hi) ? (hi) : (v))
enum { ZERO, ONE, TEN = 10, ELEVEN };
enum kind { RED = -2, GREEN };
typedef struct { int16_t x, y; } pair;
struct window { pair corner; uint8_t cells[4]; };
static const int16_t steps[] = { 1, -2, 3, [5] = 7 };
static const uint8_t grid[2][3] = { { 1, 2, 3 }, { 4, 5, 6 } };
static const pair points[2] = { { 1, 2 }, { .y = 4, .x = 3 } };
static int helper(int v) { return v < 0 ? -v : v; }
static inline uint8_t saturated(int32_t v)
{
    if (v < 0) {
        return 0;
    }
    if (v > 255) {
        return 255;
    }
    return (uint8_t)v;
}
static void swap(int *p, int *q) { int t = *p; *p = *q; *q = t; }
static void fill(uint8_t *restrict to, const uint8_t *restrict from, size_t n)
{
    while (n--) {
        *to++ = *from++;
    }
}

int64_t f_sum(int a, int b)
{
    (void)a;
    (void)b;
    return a + 3 * b - 7;
}

int64_t f_unary(int a, int b)
{
    (void)a;
    (void)b;
    return -a + +b - ~a;
}

int64_t f_negation(int a, int b)
{
    (void)a;
    (void)b;
    return !a + 2 * !!b;
}

int64_t f_shifts(int a, int b)
{
    (void)a;
    (void)b;
    return ((a + 128) >> 3) + ((unsigned)b << 2);
}

int64_t f_wide_shift(int a, int b)
{
    (void)a;
    (void)b;
    return (int64_t)b << 20;
}

int64_t f_unsigned_wrap(int a, int b)
{
    (void)a;
    (void)b;
    return (uint16_t)(b - 1);
}

int64_t f_unsigned_compare(int a, int b)
{
    (void)a;
    (void)b;
    return (unsigned)b > 100u;
}

int64_t f_signed_byte(int a, int b)
{
    (void)a;
    (void)b;
    return (int8_t)(a / 2);
}

int64_t f_division(int a, int b)
{
    (void)a;
    (void)b;
    return a / 7 + a % 7 + b / 16;
}

int64_t f_negative_divisor(int a, int b)
{
    (void)a;
    (void)b;
    return a / -5 + a % -5;
}

int64_t f_bits(int a, int b)
{
    (void)a;
    (void)b;
    return (b & 0x3c) | (b & 1) ^ 1;
}

int64_t f_mask_negative(int a, int b)
{
    (void)a;
    (void)b;
    return (a + 128) & ~7;
}

int64_t f_compare(int a, int b)
{
    (void)a;
    (void)b;
    return (a < 5) + (a <= 5) + (a > 5) + (a >= 5) + (a == 5) + (a != 5);
}

int64_t f_logical(int a, int b)
{
    (void)a;
    (void)b;
    return (a > 0 && a < 9) + 2 * (a < -3 || a > 30);
}

int64_t f_ternary(int a, int b)
{
    (void)a;
    (void)b;
    return a < 0 ? -a : a;
}

int64_t f_nested_ternary(int a, int b)
{
    (void)a;
    (void)b;
    return CLAMPED(3 * a, -100, 200);
}

int64_t f_comma(int a, int b)
{
    (void)a;
    (void)b;
    int c;
    return (c = a, c + 1);
}

int64_t f_assignments(int a, int b)
{
    (void)a;
    (void)b;
    int c = a;
    c += 2;
    c -= 1;
    c *= 3;
    c /= 2;
    c %= 50;
    return c;
}

int64_t f_bit_assignments(int a, int b)
{
    (void)a;
    (void)b;
    unsigned c = (unsigned)b;
    c &= 0xf0;
    c |= 3;
    c ^= 1;
    c <<= 2;
    c >>= 1;
    return c;
}

int64_t f_steps_before(int a, int b)
{
    (void)a;
    (void)b;
    int c = a;
    int d = ++c;
    return 10 * --d + c;
}

int64_t f_steps_after(int a, int b)
{
    (void)a;
    (void)b;
    int c = a;
    int d = c++;
    int e = d--;
    return 10 * e + c + d;
}

int64_t f_if_else(int a, int b)
{
    (void)a;
    (void)b;
    int c;
    if (a < 0) { c = 1;
    } else if (a < 10) { c = 2;
    } else { c = 3;
    } return c;
}

int64_t f_store_under_test(int a, int b)
{
    (void)a;
    (void)b;
    int c = 5;
    if (a > 3) c = a;
    return c;
}

int64_t f_early_return(int a, int b)
{
    (void)a;
    (void)b;
    if (a < -10) return -1;
    if (a > 10) return 1;
    return 0;
}

int64_t f_for_loop(int a, int b)
{
    (void)a;
    (void)b;
    int s = 0;
    for (int i = 0; i < 4; i++) s += i * a;
    return s;
}

int64_t f_while_loop(int a, int b)
{
    (void)a;
    (void)b;
    int i = 0, s = 0;
    while (i < 5) { s += a;
    i += 2;
    } return s;
}

int64_t f_do_loop(int a, int b)
{
    (void)a;
    (void)b;
    int i = 0, s = 0;
    do { s += b;
    } while (++i < 3);
    return s;
}

int64_t f_break_continue(int a, int b)
{
    (void)a;
    (void)b;
    int s = 0;
    for (int i = 0; i < 9; i++) { if (i == 2) continue;
    if (i == 6) break;
    s += i * a;
    } return s;
}

int64_t f_switch(int a, int b)
{
    (void)a;
    (void)b;
    int s = 0;
    for (int i = 0; i < 4; i++) switch (i) { case 0: s += a;
    case 1: s += 2;
    break;
    case 2: s *= 2;
    break;
    default: s -= b;
    } return s;
}

int64_t f_enumerators(int a, int b)
{
    (void)a;
    (void)b;
    return a * TEN + ELEVEN + ONE + RED + GREEN;
}

int64_t f_macro(int a, int b)
{
    (void)a;
    (void)b;
    return TWICE(a) + TWICE(b);
}

int64_t f_constant_table(int a, int b)
{
    (void)a;
    (void)b;
    int s = 0;
    for (size_t i = 0; i < sizeof steps / sizeof *steps; i++) s += steps[i] * a;
    return s;
}

int64_t f_two_dimensions(int a, int b)
{
    (void)a;
    (void)b;
    int s = 0;
    for (int y = 0; y < 2; y++) for (int x = 0; x < 3; x++) s += grid[y][x] * b;
    return s;
}

int64_t f_struct_table(int a, int b)
{
    (void)a;
    (void)b;
    return points[1].x * a + points[0].y;
}

int64_t f_struct_local(int a, int b)
{
    (void)a;
    (void)b;
    pair p = { 1, 2 };
    p.x = (int16_t)a;
    pair q = p;
    q.y += 5;
    return p.x + 100 * q.y;
}

int64_t f_struct_pointer(int a, int b)
{
    (void)a;
    (void)b;
    struct window w;
    struct window *p = &w;
    p->corner.x = (int16_t)a;
    p->cells[2] = (uint8_t)b;
    return w.corner.x * 2 + w.cells[2];
}

int64_t f_local_array(int a, int b)
{
    (void)a;
    (void)b;
    int v[3] = { a, b };
    v[2] = v[0] + v[1];
    return v[2] * 2 - v[0];
}

int64_t f_pointer_walk(int a, int b)
{
    (void)a;
    (void)b;
    int v[4] = { a, b, 3, 4 };
    int *p = v;
    int s = 0;
    while (p < v + 4) s += *p++;
    return s;
}

int64_t f_pointer_back(int a, int b)
{
    (void)a;
    (void)b;
    int v[3] = { a, b, 3 };
    const int *p = &v[2];
    return p[-1] * 2 + *(p - 2) + (int)(p - v);
}

int64_t f_pointer_null(int a, int b)
{
    (void)a;
    (void)b;
    const int *p = NULL;
    int c = a;
    if (p == NULL) p = &c;
    return p != NULL ? *p : 0;
}

int64_t f_row_pointer(int a, int b)
{
    (void)a;
    (void)b;
    int m[2][2] = { { a, b }, { 3, 4 } };
    int (*r)[2] = m;
    return r[1][0] + r[0][1] + (*r)[0];
}

int64_t f_out_parameters(int a, int b)
{
    (void)a;
    (void)b;
    int c = a, d = b;
    swap(&c, &d);
    return c - 2 * d;
}

int64_t f_helper_call(int a, int b)
{
    (void)a;
    (void)b;
    return helper(a) + helper(-b);
}

int64_t f_inline_call(int a, int b)
{
    (void)a;
    (void)b;
    return saturated(2 * a + b);
}

int64_t f_restrict_call(int a, int b)
{
    (void)a;
    (void)b;
    uint8_t u[2] = { 1, (uint8_t)b }, v[2];
    fill(v, u, 2);
    return v[1] + v[0];
}

int64_t f_look_up(int a, int b)
{
    (void)a;
    (void)b;
    static const uint8_t half[256] = { [7] = 3, [255] = 9 };
    return half[b];
}

int64_t f_memory_copy(int a, int b)
{
    (void)a;
    (void)b;
    uint8_t u[3] = { 1, (uint8_t)b, 3 }, v[3];
    memcpy(v, u, sizeof u);
    memmove(v + 1, v, 2);
    return v[2] + v[1];
}

int64_t f_memory_set(int a, int b)
{
    (void)a;
    (void)b;
    uint16_t v[2];
    memset(v, 0, sizeof v);
    v[1] = (uint16_t)b;
    return v[0] + v[1];
}

int64_t f_other_sign(int a, int b)
{
    (void)a;
    (void)b;
    int16_t v[1] = { (int16_t)a };
    const uint16_t *p = (const uint16_t *)v;
    return *p;
}

int64_t f_boolean(int a, int b)
{
    (void)a;
    (void)b;
    bool c = b;
    return c + (_Bool)(a > 3);
}

int64_t f_constants(int a, int b)
{
    (void)a;
    (void)b;
    return 0x1F + 017 + 'A' + '\n' + 40000L + 3u + (a > 0x7f);
}

int64_t f_sizes(int a, int b)
{
    (void)a;
    (void)b;
    return (int)(sizeof(int16_t) + sizeof(pair) + sizeof grid) + a * 0;
}

int64_t f_limits(int a, int b)
{
    (void)a;
    (void)b;
    return INT16_MAX + (INT8_MIN) + UINT8_MAX + a;
}

int64_t f_negative_half(int a, int b)
{
    (void)a;
    (void)b;
    return -((-a + 4) / 8);
}

int64_t f_branch_free(int a, int b)
{
    (void)a;
    (void)b;
    int v = a;
    v &= -(v > 0);
    return v;
}

int64_t f_high_multiply(int a, int b)
{
    (void)a;
    (void)b;
    return ((uint32_t)b * 43691u) >> 17;
}

int64_t f_packed(int a, int b)
{
    (void)a;
    (void)b;
    uint32_t w = (uint32_t)b | (uint32_t)(a + 128) << 16;
    return (w & 0xffff) + 3 * (w >> 16);
}

int64_t f_split_word(int a, int b)
{
    (void)a;
    (void)b;
    int v = 300 * b;
    return 256 * (v >> 8) + (v & 255);
}

int64_t f_unsigned_bias(int a, int b)
{
    (void)a;
    (void)b;
    return (int)(((uint32_t)(a + 1000) * 3u) >> 1) - 1500;
}

int64_t f_assertion(int a, int b)
{
    (void)a;
    (void)b;
    _Static_assert(sizeof(uint8_t) == 1, "a byte");
    return a;
}

int64_t f_empty(int a, int b)
{
    (void)a;
    (void)b;
    ;
    { } for (int i = 0; i < 2; i++);
    return b;
}

int64_t f_local_type(int a, int b)
{
    (void)a;
    (void)b;
    typedef int number;
    number n = a;
    return n;
}
