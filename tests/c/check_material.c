/* Dielectrics: the wideband model's limits and identities, and what is refused. Values: check_values.c. */
#include "check_util.h"

#define PI 3.14159265358979323846

static lstub_error err;

static void setup(void) { LSTUB_INIT(err); }

static lstub_dielectric dielectric(double dk, double ratio, double loss, double f_ref)
{
    lstub_dielectric d;
    LSTUB_INIT(d);
    d.dk = dk;
    d.in_plane_ratio = ratio;
    d.loss_tangent = loss;
    d.f_ref = f_ref;
    return d;
}

static void at(const lstub_dielectric *d, double f, double *through, double *in_plane)
{
    assert_ok(lstub_dielectric_permittivity(d, &f, 1, through, in_plane, &err), err);
}

START_TEST(given_point_is_met)
{
    for (uint64_t i = 0; i < 200; i++) {
        lstub_dielectric d = dielectric(1 + 10 * test_random(1, i), 0.5 + 1.5 * test_random(2, i), 0.5 * test_random(3, i),
                                        1e5 * pow(1e6, test_random(4, i)));
        double z[2], r[2];
        at(&d, d.f_ref, z, r);
        assert_close(z[0], d.dk, 1e-13, 0, "identity: the point that was given");
        assert_close(-z[1] / z[0], d.loss_tangent, 1e-12, 0, "identity: the point that was given");
        assert_close(r[0], z[0] * d.in_plane_ratio, 1e-15, 0, "identity: in-plane ratio");
        assert_close(r[1], z[1] * d.in_plane_ratio, 1e-15, 0, "identity: in-plane ratio");
    }
}
END_TEST

START_TEST(zero_means_the_default)
{
    lstub_dielectric plain = dielectric(4, 0, 0.02, 0), full = dielectric(4, 1, 0.02, 1e9);
    double a[2], b[2], in_plane[2];
    at(&plain, 3e10, a, in_plane);
    at(&full, 3e10, b, NULL);
    ck_assert(a[0] == b[0] && a[1] == b[1] && in_plane[0] == a[0]);
}
END_TEST

START_TEST(no_loss_no_dispersion)
{
    lstub_dielectric d = dielectric(3.6, 1.2, 0, 0);
    double f[3] = {1e3, 1e9, 1e12}, z[6];
    assert_ok(lstub_dielectric_permittivity(&d, f, 3, z, NULL, &err), err);
    for (int i = 0; i < 3; i++) {
        assert_close(z[2 * i], 3.6, 1e-15, 0, "limit: no loss");
        assert_close(z[2 * i + 1], 0.0, 0, 0, "limit: no loss");
    }
}
END_TEST

/* Passive: im <= 0. Causal: re falls, by (2/pi) of the loss per unit of ln f in the middle of the band. */
START_TEST(passive_and_causal)
{
    lstub_dielectric d = dielectric(4.2, 0, 0.02, 1e9);
    double before[2], z[2];
    at(&d, 1e3, before, NULL);
    for (int i = 1; i <= 900; i++) {
        double f = fmin(1e3 * pow(10.0, 0.01 * i), 1e12);
        at(&d, f, z, NULL);
        ck_assert(z[1] < 0 && z[0] < before[0]);
        if (f > 1e6 && f < 1e9)
            assert_close((z[0] - before[0]) / log(pow(10.0, 0.01)), 2 / PI * z[1], 2e-3, 0,
                         "Kramers-Kronig relation, constant loss: d re/d ln f = (2/pi) im");
        memcpy(before, z, sizeof z);
    }
}
END_TEST

/* So much loss that the model's Dk falls below that of air somewhere in its band: told, and the values are there. */
START_TEST(dk_below_1_is_told)
{
    lstub_dielectric d = dielectric(3.6, 0, 0.3, 1e9);
    double f[3] = {1e9, 1e10, 1e11}, z[6];
    LSTUB_INIT(err);
    ck_assert_int_eq(lstub_dielectric_permittivity(&d, f, 3, z, NULL, &err), LSTUB_W_RANGE);
    ck_assert_int_eq(err.status, LSTUB_W_RANGE);
    ck_assert_str_ne(err.message, "");
    ck_assert(z[0] > 1 && z[2] > 1 && z[4] < 1 && z[5] < 0);
    assert_ok(lstub_dielectric_permittivity(&d, f, 2, z, NULL, &err), err);
}
END_TEST

START_TEST(arrays_are_items_side_by_side)
{
    lstub_dielectric d = dielectric(4.2, 1.1, 0.02, 1e9);
    double f[50], all[100], part[100], in_plane[100];
    for (int i = 0; i < 50; i++)
        f[i] = 1e3 * pow(10.0, 0.18 * i);
    assert_ok(lstub_dielectric_permittivity(&d, f, 50, all, in_plane, &err), err);
    assert_ok(lstub_dielectric_permittivity(&d, f, 17, part, NULL, &err), err);
    assert_ok(lstub_dielectric_permittivity(&d, f + 17, 33, part + 34, NULL, &err), err);
    ck_assert_mem_eq(all, part, sizeof all);
    assert_ok(lstub_dielectric_permittivity(&d, f, 50, NULL, part, &err), err);
    ck_assert_mem_eq(in_plane, part, sizeof part);
    assert_ok(lstub_dielectric_permittivity(&d, NULL, 0, NULL, NULL, &err), err);
}
END_TEST

static const struct {
    double      dk, ratio, loss, f_ref;
    const char *words;
} bad[] = {
    {0, 0, 0, 0, "dk|0|1|1000"},
    {-4, 0, 0, 0, "dk|-4"},
    {0.99, 0, 0, 0, "dk|0.99"},
    {1001, 0, 0, 0, "dk|1001"},
    {NAN, 0, 0, 0, "dk|nan"},
    {INFINITY, 0, 0, 0, "dk|inf"},
    {4, 0.49, 0, 0, "in_plane_ratio|0.49|0.5|2"},
    {4, 2.01, 0, 0, "in_plane_ratio|2.01"},
    {4, -1, 0, 0, "in_plane_ratio|-1"},
    {4, NAN, 0, 0, "in_plane_ratio|nan"},
    {4, 0, -0.01, 0, "loss_tangent|-0.01|0.5"},
    {4, 0, 0.51, 0, "loss_tangent|0.51"},
    {4, 0, NAN, 0, "loss_tangent|nan"},
    {4, 0, 0, 1e4, "f_ref|10000|Hz"},
    {4, 0, 0, 1e12, "f_ref|1e+12|Hz"},
    {4, 0, 0, -1e9, "f_ref|-1e+09|Hz"},
    {4, 0, 0, NAN, "f_ref|nan"},
};

START_TEST(bad_dielectrics)
{
    lstub_dielectric d = dielectric(bad[_i].dk, bad[_i].ratio, bad[_i].loss, bad[_i].f_ref);
    double f = 1e9, z[2], r[2];
    memset(z, POISON, sizeof z);
    memset(r, POISON, sizeof r);
    assert_refused(lstub_dielectric_permittivity(&d, &f, 1, z, r, &err), LSTUB_E_ARGUMENT, err, bad[_i].words);
    ck_assert(poisoned(z, sizeof z) && poisoned(r, sizeof r));
}
END_TEST

static const double bad_frequencies[] = {0, -1e9, NAN, INFINITY, 999, 1.001e12};

START_TEST(bad_frequency_names_its_place)
{
    lstub_dielectric d = dielectric(4, 0, 0.02, 0);
    double f[4] = {1e9, 2e9, bad_frequencies[_i], 3e9}, z[8];
    memset(z, POISON, sizeof z);
    assert_refused(lstub_dielectric_permittivity(&d, f, 4, z, NULL, &err), LSTUB_E_ARGUMENT, err, "freq|2|Hz");
    ck_assert_int_eq(err.index, 2);
    ck_assert(poisoned(z, sizeof z));
    assert_refused(lstub_dielectric_permittivity(&d, NULL, 4, z, NULL, &err), LSTUB_E_NULL, err, "freq|null");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("material");
    TCase *truth = tcase_create("wideband"), *input = tcase_create("input");
    tcase_add_checked_fixture(truth, setup, NULL);
    tcase_add_checked_fixture(input, setup, NULL);
    tcase_add_test(truth, given_point_is_met);
    tcase_add_test(truth, zero_means_the_default);
    tcase_add_test(truth, no_loss_no_dispersion);
    tcase_add_test(truth, passive_and_causal);
    tcase_add_test(truth, dk_below_1_is_told);
    tcase_add_test(truth, arrays_are_items_side_by_side);
    tcase_add_loop_test(input, bad_dielectrics, 0, (int)COUNT(bad));
    tcase_add_loop_test(input, bad_frequency_names_its_place, 0, (int)COUNT(bad_frequencies));
    suite_add_tcase(suite, truth);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
