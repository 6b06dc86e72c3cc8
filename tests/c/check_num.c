/* White-box: the small mathematics inside. Expected values: identities. Bessel functions: check_bessel.c. */
#include "check_util.h"
#include "num/cplx.h"
#include "num/root.h"

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
    TCase *root = tcase_create("root"), *complex = tcase_create("complex");
    tcase_add_test(root, roots);
    tcase_add_test(root, roots_at_the_ends_and_none);
    tcase_add_test(root, minima);
    tcase_add_test(complex, complex_functions);
    tcase_add_test(complex, complex_extremes);
    suite_add_tcase(suite, root);
    suite_add_tcase(suite, complex);
    return test_main(suite);
}
