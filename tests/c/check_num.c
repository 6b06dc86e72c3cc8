/* White-box: the small mathematics inside. Expected values: mpmath 1.4.1 with 40 digits, or identities. */
#include "check_util.h"
#include "num/bessel.h"
#include "num/cplx.h"
#include "num/root.h"

static const double k0_table[][2] = {       /* x, exp(x) K0(x) = exp(x) besselk(0, x) of mpmath */
    {1e-6, 13.931456005075458763},     {1e-4, 9.3272045872745339331},     {1e-3, 7.0307160023782515185},
    {0.01, 4.7686940285444619046},     {0.1, 2.6823261022628943831},      {0.3, 1.8526273007720142825},
    {0.5, 1.52410938577390953},        {0.7, 1.3301236562420556201},      {1, 1.1444630798068950147},
    {1.5, 0.95821005329489649642},     {2, 0.84156821507077141792},       {3, 0.69776159804385177606},
    {5, 0.54780756431351898687},       {7, 0.46584509609301588792},       {8.9, 0.41454684623030242892},
    {9.1, 0.41008057837424394165},     {12, 0.35819487848907821528},      {20, 0.27854487665718222393},
    {50, 0.17680715585742933811},      {123.4, 0.11271045443152740429},   {700, 0.047362369454613572112},
    {1e3, 0.039628321600754217115},    {1e4, 0.012532984717699285288},    {1e5, 0.0039633223434747558606},
    {1e6, 0.0012533139806513212103},
};

START_TEST(k0_values)
{
    assert_close(lstub__k0_scaled(k0_table[_i][0]), k0_table[_i][1], 1e-14, 0, "mpmath 1.4.1, 40 digits");
}
END_TEST

/* Its two forms meet at x = 9: no step there beyond their rounding. */
START_TEST(k0_is_smooth)
{
    double below = lstub__k0_scaled(9.0), above = lstub__k0_scaled(nextafter(9.0, 10.0));
    assert_close(above, below, 1e-14, 0, "continuity");
    for (int i = 1; i < 400; i++) {
        double x = 1e-6 * pow(10.0, 0.03 * i);
        ck_assert_msg(lstub__k0_scaled(1.01 * x) < lstub__k0_scaled(x), "not falling at %.17g", x);
    }
}
END_TEST

static double parabola(double x, const void *context) { return x * x - *(const double *)context; }
static double steep(double x, const void *context) { (void)context; return expm1(50.0 * (x - 0.3)); }
static double pole(double x, const void *context) { (void)context; return tan(x); }
static double not_a_number(double x, const void *context) { (void)x; (void)context; return NAN; }
static double valley(double x, const void *context) { return fabs(x - *(const double *)context); }

START_TEST(roots)
{
    double two = 2.0;
    assert_close(lstub__root(parabola, &two, 0.0, 2.0, 1e-15), sqrt(2.0), 1e-15, 0, "identity");
    assert_close(lstub__root(parabola, &two, -2.0, 0.0, 1e-15), -sqrt(2.0), 1e-15, 0, "identity");
    assert_close(lstub__root(steep, NULL, -10.0, 10.0, 1e-14), 0.3, 1e-13, 0, "identity");
    assert_close(lstub__root(pole, NULL, 2.0, 4.0, 1e-15), acos(-1.0), 1e-15, 0, "identity");
    assert_close(lstub__root(parabola, &two, sqrt(2.0) - 1e-9, 1e3, 1e-13), sqrt(2.0), 1e-12, 0, "identity: root near an end");
}
END_TEST

START_TEST(roots_at_the_ends_and_none)
{
    double four = 4.0;
    assert_close(lstub__root(parabola, &four, 2.0, 5.0, 1e-12), 2.0, 0, 0, "identity: zero at an end");
    assert_close(lstub__root(parabola, &four, 0.0, 2.0, 1e-12), 2.0, 0, 0, "identity: zero at an end");
    ck_assert(isnan(lstub__root(parabola, &four, 3.0, 5.0, 1e-12)));
    ck_assert(isnan(lstub__root(not_a_number, NULL, 0.0, 1.0, 1e-12)));
    assert_close(lstub__root(parabola, &four, 0.0, 5.0, 0.0), 2.0, 1e-15, 0, "identity: no tolerance at all still ends");
}
END_TEST

START_TEST(minima)
{
    for (int i = 0; i <= 20; i++) {
        double at = 1.0 + 0.05 * i;
        assert_close(lstub__minimum(valley, &at, 1.0, 2.0, 1e-9), at, 0, 3e-9, "Brent 1973: within 3 tol of the minimum");
    }
}
END_TEST

static void check_tanh(double re, double im)
{
    cplx t = cplx_tanh(cplx_of(re, im));
    /* tan(x + jy) addition theorem, in another form than the one used inside */
    double a = tanh(re), b = tan(im), d = 1.0 + a * a * b * b;
    assert_close(t.re, a * (1.0 + b * b) / d, 1e-12, 1e-15, "identity: addition theorem");
    assert_close(t.im, b * (1.0 - a * a) / d, 1e-12, 1e-15, "identity: addition theorem");
}

START_TEST(complex_functions)
{
    for (int i = 0; i < 500; i++) {
        cplx z = cplx_of(6.0 * test_random(1, (uint64_t)i) - 3.0, 6.0 * test_random(2, (uint64_t)i) - 3.0);
        cplx r = cplx_sqrt(z), q = cplx_mul(r, r), one = cplx_div(z, z);
        ck_assert(r.re >= 0.0);
        assert_close(q.re, z.re, 0, 1e-14, "identity: square of the root");
        assert_close(q.im, z.im, 0, 1e-14, "identity: square of the root");
        assert_close(one.re, 1.0, 1e-15, 0, "identity: z/z");
        assert_close(one.im, 0.0, 0, 1e-15, "identity: z/z");
        check_tanh(z.re, z.im);
    }
}
END_TEST

START_TEST(complex_extremes)
{
    cplx t = cplx_tanh(cplx_of(800.0, 1.0)), d = cplx_div(cplx_of(1e300, 1e300), cplx_of(1e300, 1e300));
    assert_close(t.re, 1.0, 0, 0, "limit");
    assert_close(t.im, 0.0, 0, 1e-300, "limit");
    assert_close(cplx_tanh(cplx_of(-800.0, 1.0)).re, -1.0, 0, 0, "limit");
    assert_close(d.re, 1.0, 1e-15, 0, "identity: no overflow on the way");
    assert_close(cplx_tanh(cplx_of(1e-9, 0.0)).re, 1e-9, 1e-7, 0, "limit: tanh x = x");
    assert_close(cplx_sqrt(cplx_of(-4.0, 0.0)).im, 2.0, 0, 0, "principal root");
    assert_close(cplx_sqrt(cplx_of(-4.0, -0.5)).im, -2.00389, 1e-5, 0, "principal root, below the cut (by hand)");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("num");
    TCase *bessel = tcase_create("bessel"), *root = tcase_create("root"), *complex = tcase_create("complex");
    tcase_add_loop_test(bessel, k0_values, 0, (int)COUNT(k0_table));
    tcase_add_test(bessel, k0_is_smooth);
    tcase_add_test(root, roots);
    tcase_add_test(root, roots_at_the_ends_and_none);
    tcase_add_test(root, minima);
    tcase_add_test(complex, complex_functions);
    tcase_add_test(complex, complex_extremes);
    suite_add_tcase(suite, bessel);
    suite_add_tcase(suite, root);
    suite_add_tcase(suite, complex);
    return test_main(suite);
}
