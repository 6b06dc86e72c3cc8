#include "ipc2581/text.h"

#include <math.h>
#include <stdint.h>
#include <string.h>

static int is_blank(char c) { return c == ' ' || c == '\t' || c == '\n' || c == '\r'; }
static int is_digit(char c) { return c >= '0' && c <= '9'; }

/* 10 to a whole power of 0 to 22, exact in a double. */
static double exact_ten(int power)
{
    static const double ten[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,  1e8,  1e9,  1e10, 1e11,
                                 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};
    return ten[power];
}

static double scaled(double digits, int power)
{
    for (; power > 0 && digits < INFINITY; power -= power > 22 ? 22 : power)
        digits *= exact_ten(power > 22 ? 22 : power);
    for (; power < 0 && digits > 0.0; power += power < -22 ? 22 : -power)
        digits /= exact_ten(power < -22 ? 22 : -power);
    return digits;
}

/* Signed whole number after an 'e', capped so that it cannot overflow. Null when there is none. */
static const char *exponent(const char *p, int *value)
{
    int negative = *p == '-', n = 0;
    if (*p == '+' || *p == '-')
        p++;
    if (!is_digit(*p))
        return 0;
    for (; is_digit(*p); p++)
        if (n < 100000)
            n = 10 * n + (*p - '0');
    *value = negative ? -n : n;
    return p;
}

int lstub__parse_double(const char *text, double *value)
{
    const char *p = text;
    uint64_t digits = 0;
    int negative, seen = 0, dropped = 0, point = 0, after = 0, power = 0;
    double number;
    while (is_blank(*p))
        p++;
    negative = *p == '-';
    if (*p == '+' || *p == '-')
        p++;
    for (; is_digit(*p) || (*p == '.' && !point); p++) {
        if (*p == '.') {
            point = 1;
            continue;
        }
        seen = 1;
        if (digits < UINT64_C(1000000000000000000)) {
            digits = 10 * digits + (uint64_t)(*p - '0');
            if (point && after < 100000)
                after++;
        } else if (!point && dropped < 100000) {
            dropped++;
        }
    }
    if (seen && (*p == 'e' || *p == 'E') && (p = exponent(p + 1, &power)) == 0)
        return 0;
    while (is_blank(*p))
        p++;
    if (!seen || *p != '\0')
        return 0;
    /* trailing zeros would cost the exact path above 2^53 */
    while (after > 0 && digits % 10 == 0 && digits != 0) {
        digits /= 10;
        after--;
    }
    number = scaled((double)digits, power + dropped - after);
    if (!isfinite(number))
        return 0;
    *value = negative ? -number : number;
    return 1;
}

double lstub__length_unit(const char *text)
{
    static const struct {
        const char *name;
        double metres;
    } units[] = {{"INCH", 25.4e-3}, {"MILLIMETER", 1e-3}, {"MM", 1e-3}, {"MICRON", 1e-6}};
    for (size_t i = 0; i < sizeof units / sizeof units[0]; i++)
        if (strcmp(text, units[i].name) == 0)
            return units[i].metres;
    return 0.0;
}
