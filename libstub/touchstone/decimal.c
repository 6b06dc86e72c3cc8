#include "touchstone/decimal.h"

#include <float.h>
#include <math.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

/* No double and no midpoint of two has more significant digits than 768: a digit beyond only tells that there is more. */
#define DIGITS_MOST 770
/* 770 digits are 40 limbs; dividing by 5^1115, which is then the most, takes 41 more. */
#define LIMBS 84

typedef struct big {           /* value: sum of limb[i] 2^(64 i), times 2^power; more: and a little more than that */
    uint64_t limb[LIMBS];      /* lowest first, the highest not 0 */
    int      count, more;
    int32_t  power;
} big;

static const uint64_t FIVES[] = {       /* 5^0 ... 5^27, all that 64 bits hold */
    UINT64_C(1), UINT64_C(5), UINT64_C(25), UINT64_C(125), UINT64_C(625), UINT64_C(3125), UINT64_C(15625),
    UINT64_C(78125), UINT64_C(390625), UINT64_C(1953125), UINT64_C(9765625), UINT64_C(48828125), UINT64_C(244140625),
    UINT64_C(1220703125), UINT64_C(6103515625), UINT64_C(30517578125), UINT64_C(152587890625),
    UINT64_C(762939453125), UINT64_C(3814697265625), UINT64_C(19073486328125), UINT64_C(95367431640625),
    UINT64_C(476837158203125), UINT64_C(2384185791015625), UINT64_C(11920928955078125),
    UINT64_C(59604644775390625), UINT64_C(298023223876953125), UINT64_C(1490116119384765625),
    UINT64_C(7450580596923828125)};
#define FIVES_MOST 27

/* 2^(63 + n)/5^q for q = 0 ... 45, n the bits of 5^q, cut to 64 bits: between 2^63 and 2^64. */
static const uint64_t RECIPROCALS[] = {
    UINT64_C(0xFFFFFFFFFFFFFFFF), UINT64_C(0xCCCCCCCCCCCCCCCC), UINT64_C(0xA3D70A3D70A3D70A),
    UINT64_C(0x83126E978D4FDF3B), UINT64_C(0xD1B71758E219652B), UINT64_C(0xA7C5AC471B478423),
    UINT64_C(0x8637BD05AF6C69B5), UINT64_C(0xD6BF94D5E57A42BC), UINT64_C(0xABCC77118461CEFC),
    UINT64_C(0x89705F4136B4A597), UINT64_C(0xDBE6FECEBDEDD5BE), UINT64_C(0xAFEBFF0BCB24AAFE),
    UINT64_C(0x8CBCCC096F5088CB), UINT64_C(0xE12E13424BB40E13), UINT64_C(0xB424DC35095CD80F),
    UINT64_C(0x901D7CF73AB0ACD9), UINT64_C(0xE69594BEC44DE15B), UINT64_C(0xB877AA3236A4B449),
    UINT64_C(0x9392EE8E921D5D07), UINT64_C(0xEC1E4A7DB69561A5), UINT64_C(0xBCE5086492111AEA),
    UINT64_C(0x971DA05074DA7BEE), UINT64_C(0xF1C90080BAF72CB1), UINT64_C(0xC16D9A0095928A27),
    UINT64_C(0x9ABE14CD44753B52), UINT64_C(0xF79687AED3EEC551), UINT64_C(0xC612062576589DDA),
    UINT64_C(0x9E74D1B791E07E48), UINT64_C(0xFD87B5F28300CA0D), UINT64_C(0xCAD2F7F5359A3B3E),
    UINT64_C(0xA2425FF75E14FC31), UINT64_C(0x81CEB32C4B43FCF4), UINT64_C(0xCFB11EAD453994BA),
    UINT64_C(0xA6274BBDD0FADD61), UINT64_C(0x84EC3C97DA624AB4), UINT64_C(0xD4AD2DBFC3D07787),
    UINT64_C(0xAA242499697392D2), UINT64_C(0x881CEA14545C7575), UINT64_C(0xD9C7DCED53C72255),
    UINT64_C(0xAE397D8AA96C1B77), UINT64_C(0x8B61313BBABCE2C6), UINT64_C(0xDF01E85F912E37A3),
    UINT64_C(0xB267ED1940F1C61C), UINT64_C(0x8EB98A7A9A5B04E3), UINT64_C(0xE45C10C42A2B3B05),
    UINT64_C(0xB6B00D69BB55C8D1)};
#define RECIPROCALS_MOST 45

/* ---- whole numbers of many bits ------------------------------------------------------------------- */

static int leading_zeros(uint64_t x)    /* x > 0 */
{
#if defined(__GNUC__)
    return __builtin_clzll(x);
#else
    int n = 0;
    for (int half = 32; half > 0; half /= 2)
        if (x >> (64 - half) == 0) {
            n += half;
            x <<= half;
        }
    return n;
#endif
}

/* Upper half of the product. */
static uint64_t high_product(uint64_t x, uint64_t y)
{
#if defined(__SIZEOF_INT128__)
    __extension__ typedef unsigned __int128 wide;
    return (uint64_t)((wide)x * y >> 64);
#else
    const uint64_t low = UINT32_MAX;
    uint64_t x0 = x & low, x1 = x >> 32, y0 = y & low, y1 = y >> 32;
    uint64_t p01 = x0 * y1, p10 = x1 * y0;
    uint64_t middle = (x0 * y0 >> 32) + (p01 & low) + (p10 & low);
    return x1 * y1 + (p01 >> 32) + (p10 >> 32) + (middle >> 32);
#endif
}

static void multiply(big *b, uint64_t factor, uint64_t add)
{
    for (int i = 0; i < b->count; i++) {
        uint64_t high = high_product(b->limb[i], factor);
        b->limb[i] = b->limb[i] * factor + add;
        add = high + (b->limb[i] < add);
    }
    if (add != 0)
        b->limb[b->count++] = add;
}

/* One digit of base 2^32 of the long division of *high (below the divisor) with `next` behind it, by a divisor with its
** top bit set: school division, the digit guessed from the divisor's upper half and put right at most twice. */
static uint64_t divide_step(uint64_t *high, uint64_t next, uint64_t divisor)
{
    uint64_t d1 = divisor >> 32, d0 = divisor & UINT32_MAX;
    uint64_t q = *high / d1, r = *high % d1;
    while (q > UINT32_MAX || q * d0 > (r << 32 | next)) {
        q--;
        r += d1;
        if (r > UINT32_MAX)
            break;
    }
    *high = (*high << 32 | next) - q * divisor;     /* modulo 2^64, and the true value is below the divisor */
    return q;
}

static void divide(big *b, uint64_t divisor)
{
    int s = leading_zeros(divisor);     /* both are taken 2^s times as large, so that the divisor has its top bit set */
    uint64_t rest = s > 0 ? b->limb[b->count - 1] >> (64 - s) : 0;
    divisor <<= s;
    for (int i = b->count - 1; i >= 0; i--) {
        uint64_t taken = b->limb[i] << s;
        if (s > 0 && i > 0)
            taken |= b->limb[i - 1] >> (64 - s);
        uint64_t q = divide_step(&rest, taken >> 32, divisor) << 32;
        b->limb[i] = q | divide_step(&rest, taken & UINT32_MAX, divisor);
    }
    b->more |= rest != 0;
    while (b->count > 1 && b->limb[b->count - 1] == 0)
        b->count--;
}

/* Times 10^power. The quotient keeps 63 bits or more, enough for 53, a half and what is beyond. */
static void scale_ten(big *b, int power)
{
    b->power += power;
    for (int left = power; left > 0; left -= FIVES_MOST)
        multiply(b, FIVES[left < FIVES_MOST ? left : FIVES_MOST], 0);
    if (power >= 0 || b->count == 0)
        return;
    /* left until the top bit is set, then limbs of zeros for the log2(5) = 2.3219... bits that each 5 takes away */
    int s = leading_zeros(b->limb[b->count - 1]), zeros = (-power * 233 + 6399) / 6400;
    for (int i = b->count - 1; i >= 0; i--)
        b->limb[i + zeros] = b->limb[i] << s | (s > 0 && i > 0 ? b->limb[i - 1] >> (64 - s) : 0);
    memset(b->limb, 0, (size_t)zeros * sizeof b->limb[0]);
    b->count += zeros;
    b->power -= s + 64 * zeros;
    for (int left = -power; left > 0; left -= FIVES_MOST)
        divide(b, FIVES[left < FIVES_MOST ? left : FIVES_MOST]);
}

static double nearest(const big *b)
{
    if (b->count == 0)
        return 0.0;
    int top = b->count - 1, s = leading_zeros(b->limb[top]), more = b->more;
    uint64_t head = b->limb[top] << s | (s > 0 && top > 0 ? b->limb[top - 1] >> (64 - s) : 0);
    for (int i = 0; i < top; i++)
        more |= (i == top - 1 ? b->limb[i] << s : b->limb[i]) != 0;
    int exponent = b->power + 64 * top - s;         /* value: head 2^exponent, 2^63 <= head < 2^64 */
    int drop = exponent < DBL_MIN_EXP - 64 ? DBL_MIN_EXP - DBL_MANT_DIG - exponent : 64 - DBL_MANT_DIG;
    if (drop > 64)
        return 0.0;
    uint64_t kept = drop == 64 ? 0 : head >> drop, half = UINT64_C(1) << (drop - 1), rest = head & (2 * half - 1);
    if (rest > half || (rest == half && (more || (kept & 1) != 0)))
        kept++;
    return ldexp((double)kept, exponent + drop);
}

/* ---- reading --------------------------------------------------------------------------------------- */

static unsigned digit(char c) { return (unsigned)(unsigned char)c - '0'; }     /* above 9: none */

/* 2^n, a normal number. */
static double two_to(int n)
{
    uint64_t bits = (uint64_t)(n - DBL_MIN_EXP + 2) << (DBL_MANT_DIG - 1);
    double value;
    memcpy(&value, &bits, sizeof value);
    return value;
}

/*
** digits 10^power for power from -45 to -1 with one multiplication, or 0 where that does not tell the last bit. The
** reciprocal is cut by less than 1 and so is the product, so the upper half is too small by less than 2, in units of its last
** bit: which way to round is known unless what is below the 53 bits kept comes that near to a half from below. (Where it
** comes so near to a whole, up is right either way.)
*/
static int quickly(uint64_t digits, int power, double *value)
{
    int s = leading_zeros(digits), drop = 64 - DBL_MANT_DIG - 1;
    uint64_t product = high_product(digits << s, RECIPROCALS[-power]);      /* from 2^62 on */
    drop += (int)(product >> 63);
    uint64_t half = UINT64_C(1) << (drop - 1), rest = product & (2 * half - 1);
    if (rest <= half && rest + 2 > half)
        return 0;
    /* 2^s digits 2^(63 + n) = product 2^64 5^-power; n, the bits of 5^q: 1 + floor(q log2(5)) */
    int n = 1 + -power * 2322 / 1000;
    *value = (double)(int64_t)((product >> drop) + (rest > half)) * two_to(power + 1 - s - n + drop);
    return 1;
}

/* digits 10^power */
static double from_word(uint64_t digits, int power)
{
    double value;
    if (digits == 0)
        return 0.0;
#if defined(FLT_EVAL_METHOD) && FLT_EVAL_METHOD == 0
    /* Both exact in a double: one operation rounds once (Clinger, PLDI 1990). */
    static const double TENS[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,  1e8,  1e9,  1e10, 1e11,
                                  1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};
    if (digits <= UINT64_C(1) << DBL_MANT_DIG && power >= -22 && power <= 22)
        return power < 0 ? (double)(int64_t)digits / TENS[-power] : (double)(int64_t)digits * TENS[power];
#endif
    if (power < 0 && power >= -RECIPROCALS_MOST && quickly(digits, power, &value))
        return value;
    if (power < -345)
        return 0.0;
    if (power > 310)
        return HUGE_VAL;
    big b;
    b.limb[0] = digits;
    b.count = 1;
    b.more = 0;
    b.power = 0;
    scale_ten(&b, power);
    return nearest(&b);
}

/* The same of a text of digits and a point, the point to be left out and power to be that of its last digit. */
static double from_text(const char *text, const char *end, int count, int power)
{
    for (; text < end && (*text == '0' || *text == '.'); text++)
        count -= *text == '0';
    if (count + power < -330)
        return 0.0;
    if (count + power > 310)
        return HUGE_VAL;
    big b;
    b.count = b.more = 0;
    b.power = 0;
    int taken = 0;
    for (; text < end && taken < DIGITS_MOST; text++)
        if (*text != '.') {
            multiply(&b, 10, digit(*text));
            taken++;
        }
    for (; text < end; text++)
        b.more |= *text != '.' && *text != '0';
    scale_ten(&b, power + count - taken);
    return nearest(&b);
}

/* Of "e+05": its end, or null. Capped where it is beyond any double, whatever the number of digits before it. */
static const char *read_exponent(const char *p, int *power)
{
    int negative = *p == '-', n = 0;
    if (*p == '+' || *p == '-')
        p++;
    if (digit(*p) > 9)
        return NULL;
    for (; digit(*p) <= 9; p++)
        if (n < 100000000)
            n = 10 * n + (int)digit(*p);
    *power += negative ? -n : n;
    return p;
}

#if defined(__GNUC__) && defined(__BYTE_ORDER__) && __BYTE_ORDER__ == __ORDER_LITTLE_ENDIAN__

/* Appends the digits that p begins with to *word, modulo 2^64; their end. Eight bytes at once: they are 0x30 to 0x39 where
** they, and 6 more than they, have an upper half of 3. Those behind the first other one are pushed out, zeros come in at the
** front, and neighbours are put together to pairs, fours and eights. */
static const char *read_digits(const char *p, uint64_t *word)
{
    static const uint64_t TENS[] = {1, 10, 100, 1000, 10000, 100000, 1000000, 10000000, 100000000};
    for (;;) {
        uint64_t x, other;
        int count = 8;
        memcpy(&x, p, 8);
        other = ((x & (x + UINT64_C(0x0606060606060606))) & UINT64_C(0xF0F0F0F0F0F0F0F0)) ^ UINT64_C(0x3030303030303030);
        if (other != 0) {
            count = __builtin_ctzll(other) / 8;
            if (count == 0)
                return p;
            x <<= 64 - 8 * count;
        }
        x = (x & UINT64_C(0x0F0F0F0F0F0F0F0F)) * (10 * 256 + 1) >> 8 & UINT64_C(0x00FF00FF00FF00FF);
        x = x * (100 * 65536 + 1) >> 16 & UINT64_C(0x0000FFFF0000FFFF);
        x = x * (UINT64_C(10000) * UINT64_C(4294967296) + 1) >> 32;
        *word = TENS[count] * *word + x;
        p += count;
        if (count < 8)
            return p;
    }
}

#else

/* The same, byte by byte. */
static const char *read_digits(const char *p, uint64_t *word)
{
    uint64_t w = *word;
    unsigned d;
    for (; (d = digit(*p)) <= 9; p++)
        w = 10 * w + d;
    *word = w;
    return p;
}

#endif

const char *lstub__decimal_read(const char *p, int shift, double *value)
{
    static const double SIGNS[] = {1.0, -1.0};      /* signs come at random: no branch */
    int negative = *p == '-', power = shift;
    uint64_t word = 0;
    p += negative | (*p == '+');
    const char *first = p;
    p = read_digits(p, &word);
    ptrdiff_t count = p - first;
    if (*p == '.') {
        const char *point = p++;
        p = read_digits(p, &word);
        count += p - point - 1;
        power -= (int)(p - point - 1);
    }
    const char *last = p;
    if (count == 0)
        return NULL;
    if ((*p | 0x20) == 'e' || (*p | 0x20) == 'd')
        if ((p = read_exponent(p + 1, &power)) == NULL)
            return NULL;
    double v = count <= 19 ? from_word(word, power) : from_text(first, last, (int)count, power);
    *value = SIGNS[negative] * v;
    return p;
}

/* ---- writing --------------------------------------------------------------------------------------- */

/* Digits without the point and the zeros at the end; returns how many, *power that of the first. Whatever the locale's
** decimal point, it is no digit. */
static int split(double magnitude, int digits, char out[20], int *power)
{
    char text[LSTUB__DECIMAL_MAX];
    const char *p = text;
    int count = 0;
    snprintf(text, sizeof text, "%.*e", digits - 1, magnitude);
    for (; *p != 'e' && *p != '\0'; p++)
        if (digit(*p) <= 9 && count < 19)
            out[count++] = *p;
    *power = 0;
    if (*p == 'e')
        read_exponent(p + 1, power);
    while (count > 1 && out[count - 1] == '0')
        count--;
    out[count] = '\0';
    return count;
}

static int lay_out(char *text, int negative, const char *digits, int count, int power)
{
    char *p = text;
    if (negative)
        *p++ = '-';
    if (digits[0] == '0') {
        *p++ = '0';
    } else if (power >= 0 && power < 17) {
        for (int i = 0; i <= power || i < count; i++) {
            if (i == power + 1)
                *p++ = '.';
            *p++ = i < count ? digits[i] : '0';
        }
    } else if (power < 0 && power > -5) {
        *p++ = '0';
        *p++ = '.';
        for (int i = -1; i > power; i--)
            *p++ = '0';
        memcpy(p, digits, (size_t)count);
        p += count;
    } else {
        *p++ = digits[0];
        if (count > 1) {
            *p++ = '.';
            memcpy(p, digits + 1, (size_t)count - 1);
            p += count - 1;
        }
        p += snprintf(p, 8, "e%d", power);
    }
    memset(p, 0, 1 + LSTUB__DECIMAL_AHEAD);     /* it is read again */
    return (int)(p - text);
}

int lstub__decimal_write(char text[LSTUB__DECIMAL_MAX], double value, int digits, int shift)
{
    char found[20];
    int power = 0, count = 0, bytes = 0;
    for (int n = digits > 0 ? digits : 15; n <= 17; n++) {
        double back = 0.0;
        count = split(fabs(value), n, found, &power);
        bytes = lay_out(text, signbit(value) != 0, found, count, power + shift);
        if (digits > 0)
            break;
        lstub__decimal_read(text, -shift, &back);
        if (back == value)
            break;
    }
    return bytes;
}
