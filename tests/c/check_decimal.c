/* Decimal numbers of Touchstone files: against the C library's own, which rounds correctly. */
#include "check_util.h"
#include "touchstone/decimal.h"

#include <float.h>

static double bits(uint64_t word)
{
    double d;
    memcpy(&d, &word, sizeof d);
    return d;
}

static uint64_t random_bits(uint64_t seed, uint64_t n)
{
    return (uint64_t)(test_random(seed, n) * 0x1p32) << 32 | (uint64_t)(test_random(seed + 100, n) * 0x1p32);
}

static char text[1400];

static void compare(const char *what)
{
    double got = 7.0, want = strtod(text, NULL);
    size_t end = strlen(text);
    memset(text + end, 0, 1 + LSTUB__DECIMAL_AHEAD);
    const char *after = lstub__decimal_read(text, 0, &got);
    ck_assert_msg(after == text + end, "%s: '%s' ends elsewhere", what, text);
    ck_assert_msg(memcmp(&got, &want, sizeof got) == 0, "%s: '%s' is %.17g, not %.17g", what, text, got, want);
}

/* Any double, with any number of digits. */
START_TEST(doubles)
{
    for (uint64_t i = 0; i < 40000; i++) {
        double d = bits(random_bits(1, i));
        if (!isfinite(d))
            continue;
        snprintf(text, sizeof text, "%.*e", (int)(i % 25), d);
        compare("any double");
        snprintf(text, sizeof text, "%.17g", test_random(2, i) * pow(10.0, (double)(i % 24) - 20.0));
        compare("usual number");
        snprintf(text, sizeof text, "%.17e", bits(random_bits(3, i) >> 12));
        compare("subnormal number");
    }
}
END_TEST

/* Up to 40 digits before the exponent, on all ways through: one division, one multiplication, long numbers. */
START_TEST(digits)
{
    for (uint64_t i = 0; i < 40000; i++) {
        unsigned long long a = random_bits(4, i) >> i % 60, b = random_bits(5, i);
        snprintf(text, sizeof text, "%s%llue%d", i % 2 ? "-" : "+", a, (int)(random_bits(6, i) % 90) - 60);
        compare("whole number and exponent");
        snprintf(text, sizeof text, "%llu.%020llu%020llue%d", a, b, a, (int)(random_bits(7, i) % 700) - 360);
        compare("many digits");
    }
}
END_TEST

/* Halfway between two doubles, and a little beside it. A sum of a double and half its last bit is exact in its digits. */
START_TEST(midpoints)
{
    for (uint64_t i = 0; i < 4000; i++) {
        int power = (int)(random_bits(8, i) % 120) - 60;
        uint64_t whole = UINT64_C(1) << 53 | random_bits(9, i) >> 11;      /* 54 bits with the half appended */
        snprintf(text, sizeof text, "%.0f", ldexp((double)whole, 1));
        char *last = text + strlen(text) - 1;          /* 2 whole is even: + 1 never carries */
        ++*last;
        compare("midpoint");
        snprintf(text + strlen(text), 64, ".%0*d1", 20 + (int)(i % 20), 0);
        compare("above a midpoint");
        snprintf(text, sizeof text, "%.120f", ldexp((double)(2 * (whole >> 3) + 1), power - 52));
        compare("exact digits");
    }
    snprintf(text, sizeof text, "%.1074f", DBL_MIN * DBL_EPSILON);      /* the least double, in full */
    compare("least double");
    strcpy(text, "2.4703282292062327208e-324");
    compare("half the least double, and less");
    strcpy(text, "2.4703282292062327209e-324");
    compare("half the least double, and more");
    strcpy(text, "1.7976931348623158e308");
    compare("rounds to the greatest double");
    strcpy(text, "1.7976931348623159e308");
    compare("rounds to infinity");
}
END_TEST

/* 770 digits are looked at; one beyond them must still tell. */
START_TEST(digit_that_tells)
{
    double got;
    memset(text, 0, sizeof text);
    strcpy(text, "9007199254740993.");                  /* 2^53 + 1: a midpoint, to even 2^53 */
    memset(text + strlen(text), '0', 900);
    ck_assert_ptr_nonnull(lstub__decimal_read(text, 0, &got));
    ck_assert(got == 9007199254740992.0);
    text[strlen(text)] = '1';
    ck_assert_ptr_nonnull(lstub__decimal_read(text, 0, &got));
    ck_assert(got == 9007199254740994.0);
}
END_TEST

START_TEST(grammar)
{
    static const struct {
        const char *text;
        double      value;
        size_t      used;
    } good[] = {{"1.5e-3", 1.5e-3, 6}, {"+1", 1, 2}, {".5", 0.5, 2}, {"1.", 1, 2}, {"-.25E+1 ", -2.5, 7}, {"1D-3", 1e-3, 4}, {"2d2!", 200, 3},
                {"00012x", 12, 5}, {"1e400", HUGE_VAL, 5}, {"-1e99999999999999999999", -HUGE_VAL, 23}, {"1e-400", 0, 6},
                {"0e99999999999", 0, 13}, {"0.00000000000000000000000000000012e31", 1.2, 37},
                {"12,5", 12, 2}};
    static const char *const bad[] = {"", "+", "-", ".", "e5", "1e", "1e+", "x", "nan", "inf", "-.e3", "--1", "1d ", "+-1"};
    double value;
    for (size_t i = 0; i < COUNT(good); i++) {
        memset(text, 0, sizeof text);
        strcpy(text, good[i].text);
        ck_assert_msg(lstub__decimal_read(text, 0, &value) == text + good[i].used, "%s", text);
        assert_close(value, good[i].value, 1e-15, 0, "by hand");
    }
    for (size_t i = 0; i < COUNT(bad); i++) {
        memset(text, 0, sizeof text);
        strcpy(text, bad[i]);
        ck_assert_msg(lstub__decimal_read(text, 0, &value) == NULL, "'%s'", text);
    }
    memset(text, 0, sizeof text);
    strcpy(text, "0.57");
    ck_assert_ptr_nonnull(lstub__decimal_read(text, 9, &value));        /* 0.57 * 1e9 in doubles is not 570000000 */
    ck_assert(value == 570000000.0);
}
END_TEST

/* Written and read back, with the point moved both ways. */
START_TEST(round_trip)
{
    char out[LSTUB__DECIMAL_MAX];
    for (uint64_t i = 0; i < 40000; i++) {
        double d = bits(random_bits(10, i)), back = 0.0;
        int shift = 3 * (int)(i % 4);
        if (!isfinite(d))
            continue;
        if (i % 2)
            d = (test_random(11, i) - 0.5) * pow(10.0, (double)(i % 20) - 8.0);
        ck_assert_int_eq(lstub__decimal_write(out, d, i % 3 ? 0 : 17, -shift), (int)strlen(out));
        ck_assert(strlen(out) + LSTUB__DECIMAL_AHEAD < sizeof out);
        ck_assert_ptr_nonnull(lstub__decimal_read(out, shift, &back));
        ck_assert_msg(memcmp(&back, &d, sizeof d) == 0, "%.17g written as %s e%d is %.17g", d, out, shift, back);
    }
}
END_TEST

START_TEST(written)
{
    static const struct {
        double      value;
        int         digits, shift;
        const char *text;
    } cases[] = {{0.1, 0, 0, "0.1"}, {-0.0, 0, 0, "-0"}, {1e9, 0, -9, "1"}, {5.7e8, 0, -9, "0.57"}, {1234567.0, 3, 0, "1230000"}, {12.5, 17, 0, "12.5"},
                 {1e-7, 0, 0, "1e-7"}, {-1.25e30, 0, 0, "-1.25e30"}, {0.00012, 0, 0, "0.00012"}, {1.0 / 3.0, 0, 0, "0.3333333333333333"},
                 {1e16, 0, 0, "10000000000000000"}, {2.0 / 3.0, 1, 0, "0.7"}, {50, 0, 0, "50"}};
    char out[LSTUB__DECIMAL_MAX];
    for (size_t i = 0; i < COUNT(cases); i++) {
        lstub__decimal_write(out, cases[i].value, cases[i].digits, cases[i].shift);
        ck_assert_str_eq(out, cases[i].text);
    }
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("decimal");
    TCase *reading = tcase_create("reading"), *writing = tcase_create("writing");
    tcase_add_test(reading, doubles);
    tcase_add_test(reading, digits);
    tcase_add_test(reading, midpoints);
    tcase_add_test(reading, digit_that_tells);
    tcase_add_test(reading, grammar);
    tcase_add_test(writing, round_trip);
    tcase_add_test(writing, written);
    suite_add_tcase(suite, reading);
    suite_add_tcase(suite, writing);
    return test_main(suite);
}
