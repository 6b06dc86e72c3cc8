/* Networks against tests/data/networks.csv (tests/tools/make_network_table.py: scikit-rf, NumPy), identities, and input. */
#include "check_network.h"

#define PORTS2 (LSTUB_PORTS_MAX * LSTUB_PORTS_MAX)

static int32_t run_mixed(const lines *c, double *out, lstub_error *err)
{
    size_t p = (size_t)c->p;
    int32_t pairs[LSTUB_PORTS_MAX], count = 0;
    double z_mixed[LSTUB_PORTS_MAX], *z = get(c, "z", p), *want = get(c, "z_mixed", p), *s = get(c, "s", 2 * p * p);
    const double *given = get(c, "pairs", 0);
    for (int k = 0; k < c->count; k++)
        if (strcmp(c->line[k].key, "pairs") == 0)
            count = (int32_t)(c->line[k].n / 2);
    for (int k = 0; k < 2 * count; k++)
        pairs[k] = (int32_t)given[k];
    int32_t status = lstub_network_to_mixed(s, 1, c->p, pairs, count, z, out, z_mixed, NULL, err);
    for (size_t k = 0; k < p; k++)
        assert_close(z_mixed[k], want[k], 1e-14, 0.0, SOURCE);
    double back[2 * PORTS2];
    assert_ok(lstub_network_to_single(out, 1, c->p, pairs, count, z, back, NULL, err), *err);
    for (size_t k = 0; k < 2 * p * p; k++)
        assert_close(back[k], s[k], 0.0, 1e-13, "there and back");
    return status;
}

/* Runs a case's function; the number of doubles that come out. */
static size_t run(const lines *c, double *out)
{
    lstub_error err;
    LSTUB_INIT(err);
    size_t p = (size_t)c->p, all = 2 * p * p;
    const char *f = c->function;
    if (strcmp(f, "renormalise") == 0)
        assert_ok(lstub_network_renormalise(get(c, "s", all), 1, c->p, get(c, "z_from", p), get(c, "z_to", p), out, NULL, &err), err);
    else if (strcmp(f, "renormalise_complex") == 0)
        assert_ok(lstub_network_renormalise_complex(get(c, "s", all), 1, c->p, get(c, "z_from", 2 * p), get(c, "z_to", 2 * p), out, NULL, &err),
                  err);
    else if (strcmp(f, "convert") == 0)
        assert_ok(lstub_network_convert(get(c, "s", all), 1, c->p, (int32_t)get(c, "kinds", 2)[0], (int32_t)get(c, "kinds", 2)[1],
                                        get(c, "z", p), out, NULL, &err), err);
    else if (strcmp(f, "cascade") == 0)
        assert_ok(lstub_network_cascade(get(c, "a", all), get(c, "b", all), 1, c->p, out, NULL, &err), err);
    else if (strcmp(f, "deembed_left") == 0)
        assert_ok(lstub_network_deembed(get(c, "a", all), get(c, "b", all), NULL, 1, c->p, out, NULL, &err), err);
    else if (strcmp(f, "deembed_right") == 0)
        assert_ok(lstub_network_deembed(get(c, "a", all), NULL, get(c, "b", all), 1, c->p, out, NULL, &err), err);
    else if (strcmp(f, "shunt") == 0)
        assert_ok(lstub_network_shunt(get(c, "zin", 2), 1, get(c, "z", 1)[0], out, NULL, &err), err);
    else if (strcmp(f, "mixed") == 0)
        assert_ok(run_mixed(c, out, &err), err);
    else {
        if (strcmp(f, "passivity") == 0)
            assert_ok(lstub_network_passivity(get(c, "s", all), 1, c->p, out, NULL, &err), err);
        else
            assert_ok(lstub_network_reciprocity(get(c, "s", all), 1, c->p, out, NULL, &err), err);
        return 1;
    }
    return all;
}

static const struct function {
    const char *name;
    int         cases;         /* at least */
} functions[] = {{"renormalise", 6},   {"renormalise_complex", 6}, {"convert", 72}, {"cascade", 4},   {"deembed_left", 2},
                 {"deembed_right", 2}, {"shunt", 10},              {"mixed", 8},    {"passivity", 7}, {"reciprocity", 5}};

START_TEST(table)
{
    int found = 0;
    for (size_t i = 0; i < case_count; i++) {
        const lines *c = &cases[i];
        if (strcmp(c->function, functions[_i].name) != 0)
            continue;
        double out[2 * PORTS2], largest = 0.0;
        size_t n = run(c, out);
        const double *want = get(c, "want", n);
        for (size_t k = 0; k < n; k++)
            largest = fmax(largest, fabs(want[k]));
        for (size_t k = 0; k < n; k++)
            assert_close(out[k], want[k], 0.0, 1e-12 * largest, SOURCE);
        found++;
    }
    ck_assert_int_ge(found, functions[_i].cases);
}
END_TEST

static void random_matrix(double *s, int32_t p, uint64_t seed, double size)
{
    for (int k = 0; k < 2 * p * p; k++)
        s[k] = size * (2.0 * test_random(seed, (uint64_t)k) - 1.0) / sqrt(p);
}

static void assert_same(const double *got, const double *want, int32_t p, double room, const char *source)
{
    for (int k = 0; k < 2 * p * p; k++)
        assert_close(got[k], want[k], 0.0, room, source);
}

START_TEST(cascade_identities)
{
    lstub_error err;
    LSTUB_INIT(err);
    for (int32_t p = 2; p <= LSTUB_PORTS_MAX; p += 2) {
        double a[2 * PORTS2], b[2 * PORTS2], c[2 * PORTS2], through[2 * PORTS2] = {0.0}, ab[2 * PORTS2], bc[2 * PORTS2], x[2 * PORTS2], y[2 * PORTS2];
        random_matrix(a, p, 1, 1.0);
        random_matrix(b, p, 2, 1.0);
        random_matrix(c, p, 3, 1.0);
        for (int k = 0; k < p; k++)
            through[2 * (k * p + (k + p / 2) % p)] = 1.0;
        assert_ok(lstub_network_cascade(a, through, 1, p, x, NULL, &err), err);
        assert_same(x, a, p, 0.0, "a through behind it changes nothing");
        assert_ok(lstub_network_cascade(through, a, 1, p, x, NULL, &err), err);
        assert_same(x, a, p, 0.0, "a through before it changes nothing");
        assert_ok(lstub_network_cascade(a, b, 1, p, ab, NULL, &err), err);
        assert_ok(lstub_network_cascade(b, c, 1, p, bc, NULL, &err), err);
        assert_ok(lstub_network_cascade(ab, c, 1, p, x, NULL, &err), err);
        assert_ok(lstub_network_cascade(a, bc, 1, p, y, NULL, &err), err);
        assert_same(x, y, p, 1e-12, "(ab)c = a(bc)");
        assert_ok(lstub_network_deembed(x, a, c, 1, p, y, NULL, &err), err);
        assert_same(y, b, p, 1e-10, "b taken out of abc");
        assert_ok(lstub_network_deembed(b, NULL, NULL, 1, p, y, NULL, &err), err);
        assert_same(y, b, p, 0.0, "nothing taken off");
    }
}
END_TEST

/* Chain matrices of 2m-ports multiply. */
START_TEST(chain_matrices)
{
    lstub_error err;
    LSTUB_INIT(err);
    for (int32_t p = 2; p <= 8; p += 2) {
        double a[2 * PORTS2], b[2 * PORTS2], ab[2 * PORTS2], ca[2 * PORTS2], cb[2 * PORTS2], product[2 * PORTS2], s[2 * PORTS2], z[LSTUB_PORTS_MAX];
        random_matrix(a, p, 4, 1.0);
        random_matrix(b, p, 5, 1.0);
        for (int k = 0; k < p; k++)
            z[k] = 40.0 + 5.0 * (k % (p / 2));         /* the right ones as the left ones */
        assert_ok(lstub_network_convert(a, 1, p, LSTUB_NETWORK_S, LSTUB_NETWORK_ABCD, z, ca, NULL, &err), err);
        assert_ok(lstub_network_convert(b, 1, p, LSTUB_NETWORK_S, LSTUB_NETWORK_ABCD, z, cb, NULL, &err), err);
        for (int i = 0; i < p; i++)
            for (int j = 0; j < p; j++) {
                double re = 0.0, im = 0.0;
                for (int k = 0; k < p; k++) {
                    const double *u = ca + 2 * (i * p + k), *v = cb + 2 * (k * p + j);
                    re += u[0] * v[0] - u[1] * v[1];
                    im += u[0] * v[1] + u[1] * v[0];
                }
                product[2 * (i * p + j)] = re;
                product[2 * (i * p + j) + 1] = im;
            }
        assert_ok(lstub_network_convert(product, 1, p, LSTUB_NETWORK_ABCD, LSTUB_NETWORK_S, z, s, NULL, &err), err);
        assert_ok(lstub_network_cascade(a, b, 1, p, ab, NULL, &err), err);
        assert_same(s, ab, p, 1e-11, "product of chain matrices = cascade");
    }
}
END_TEST

/* An impedance between two ports and nothing to ground: all that the differential mode sees, nothing of the common one. */
START_TEST(unequal_references)
{
    lstub_error err;
    LSTUB_INIT(err);
    const double x = 70.0, z[2] = {30.0, 80.0};
    const double y[8] = {1 / x, 0, -1 / x, 0, -1 / x, 0, 1 / x, 0};
    const int32_t pair[2] = {1, 0};
    double s[8], m[8], z_mixed[2];
    assert_ok(lstub_network_convert(y, 1, 2, LSTUB_NETWORK_Y, LSTUB_NETWORK_S, z, s, NULL, &err), err);
    assert_ok(lstub_network_to_mixed(s, 1, 2, pair, 1, z, m, z_mixed, NULL, &err), err);
    assert_close(z_mixed[0], 110.0, 1e-15, 0.0, "in series");
    assert_close(z_mixed[1], 30.0 * 80.0 / 110.0, 1e-15, 0.0, "in parallel");
    const double want[8] = {(x - 110.0) / (x + 110.0), 0, 0, 0, 0, 0, 1, 0};
    assert_same(m, want, 2, 1e-14, "reflection of x at zp + zn, and of an open");
}
END_TEST

START_TEST(there_and_back)
{
    lstub_error err;
    LSTUB_INIT(err);
    for (int32_t p = 1; p <= LSTUB_PORTS_MAX; p++) {
        double s[2 * PORTS2], x[2 * PORTS2], y[2 * PORTS2], a[LSTUB_PORTS_MAX], b[LSTUB_PORTS_MAX];
        const int32_t pairs[6] = {p - 1, 0, 2, 1, 3, 4}, count = p >= 6 ? 3 : p >= 4 ? 2 : p / 2;
        random_matrix(s, p, 6, 1.0);
        for (int k = 0; k < p; k++) {
            a[k] = 20.0 + 100.0 * test_random(7, (uint64_t)k);
            b[k] = 20.0 + 100.0 * test_random(8, (uint64_t)k);
        }
        assert_ok(lstub_network_renormalise(s, 1, p, a, b, x, NULL, &err), err);
        assert_ok(lstub_network_renormalise(x, 1, p, b, a, y, NULL, &err), err);
        assert_same(y, s, p, 1e-12, "there and back");
        assert_ok(lstub_network_renormalise(s, 1, p, a, a, x, NULL, &err), err);
        assert_same(x, s, p, 1e-15, "same references");
        assert_ok(lstub_network_to_mixed(s, 1, p, pairs, count, a, x, NULL, NULL, &err), err);
        assert_ok(lstub_network_to_single(x, 1, p, pairs, count, a, y, NULL, &err), err);
        assert_same(y, s, p, 1e-12, "there and back");
        for (int32_t kind = LSTUB_NETWORK_Z; kind <= LSTUB_NETWORK_H; kind++) {
            if ((kind == LSTUB_NETWORK_ABCD && p % 2 == 1) || (kind > LSTUB_NETWORK_ABCD && p != 2))
                continue;
            assert_ok(lstub_network_convert(s, 1, p, LSTUB_NETWORK_S, kind, a, x, NULL, &err), err);
            assert_ok(lstub_network_convert(x, 1, p, kind, LSTUB_NETWORK_S, a, y, NULL, &err), err);
            assert_same(y, s, p, 1e-11, "there and back");
        }
    }
}
END_TEST

/* Complex references are those of the item; real ones as complex ones say the same. */
START_TEST(references_of_each_frequency)
{
    lstub_error err;
    double s[16], both[16], one[8], plain[8];
    const double from[8] = {50, 3, 60, -2, 70, 0, 80, 0}, to[8] = {45, -1, 55, 4, 40, 0, 90, 0}, from_real[2] = {70, 80}, to_real[2] = {40, 90};
    LSTUB_INIT(err);
    random_matrix(s, 2, 12, 1.0);
    random_matrix(s + 8, 2, 13, 1.0);
    assert_ok(lstub_network_renormalise_complex(s, 2, 2, from, to, both, NULL, &err), err);
    assert_ok(lstub_network_renormalise_complex(s, 1, 2, from, to, one, NULL, &err), err);
    assert_same(both, one, 2, 0.0, "the first alone");
    assert_ok(lstub_network_renormalise(s + 8, 1, 2, from_real, to_real, plain, NULL, &err), err);
    assert_same(both + 8, plain, 2, 0.0, "the second, real");
}
END_TEST

/* Z = R + jX, R positive definite, X symmetric: passive; without R lossless. */
START_TEST(passive_networks)
{
    lstub_error err;
    LSTUB_INIT(err);
    for (int32_t p = 1; p <= LSTUB_PORTS_MAX; p++)
        for (int lossy = 0; lossy <= 1; lossy++) {
            double z[2 * PORTS2], s[2 * PORTS2], references[LSTUB_PORTS_MAX], sigma, difference;
            for (int i = 0; i < p; i++) {
                references[i] = 30.0 + 10.0 * i;
                for (int j = 0; j < p; j++) {
                    double r = 0.0;
                    for (int k = 0; k < p; k++)
                        r += (test_random(9, (uint64_t)(i * p + k)) - 0.5) * (test_random(9, (uint64_t)(j * p + k)) - 0.5);
                    z[2 * (i * p + j)] = lossy ? 60.0 * r : 0.0;
                    z[2 * (i * p + j) + 1] = 100.0 * (test_random(10, (uint64_t)(i * j + i + j)) - 0.5);
                }
            }
            assert_ok(lstub_network_convert(z, 1, p, LSTUB_NETWORK_Z, LSTUB_NETWORK_S, references, s, NULL, &err), err);
            assert_ok(lstub_network_passivity(s, 1, p, &sigma, NULL, &err), err);
            assert_ok(lstub_network_reciprocity(s, 1, p, &difference, NULL, &err), err);
            ck_assert_msg(sigma <= 1.0 + 1e-13 && (lossy || sigma > 1.0 - 1e-13), "%d ports: %.17g", (int)p, sigma);
            ck_assert_msg(difference < 1e-13, "%d ports: %.17g", (int)p, difference);
        }
}
END_TEST

/* What has no such matrix says so, and its neighbours come out. */
START_TEST(singular)
{
    lstub_error err;
    int32_t status[4];
    double out[32];
    const double s[32] = {0, 0, 1, 0, 1, 0, 0, 0,     0.1, 0, 0.5, 0, 0.5, 0, 0.1, 0,
                          0.3, 0, 0, 0, 0, 0, -0.4, 0,     0, 0, 1 - 1e-12, 0, 1 - 1e-12, 0, 0, 0};
    assert_refused(lstub_network_convert(s, 4, 2, LSTUB_NETWORK_S, LSTUB_NETWORK_Z, NULL, out, status, &err), LSTUB_E_NONE, err, "item 0|z: singular");
    ck_assert_int_eq(status[0], LSTUB_E_NONE);
    ck_assert_int_eq(status[1], LSTUB_OK);
    ck_assert_int_eq(status[2], LSTUB_OK);
    ck_assert_int_eq(status[3], LSTUB_W_RANGE);
    ck_assert_int_eq(err.index, 0);
    for (int k = 0; k < 8; k++)
        ck_assert(isnan(out[k]) && isfinite(out[8 + k]));
    assert_refused(lstub_network_convert(s, 4, 2, LSTUB_NETWORK_S, LSTUB_NETWORK_ABCD, NULL, out, status, &err), LSTUB_E_NONE, err, "item 2|abcd");
    ck_assert_int_eq(status[0], LSTUB_OK);
    const double ones[4] = {1, 0, 1 - 1e-11, 0};       /* one port: open, and all but open */
    assert_refused(lstub_network_convert(ones, 2, 1, LSTUB_NETWORK_S, LSTUB_NETWORK_Z, NULL, out, status, &err), LSTUB_E_NONE, err, "item 0");
    ck_assert_int_eq(status[1], LSTUB_W_RANGE);
    const double wall[8] = {0.5, 0, 0, 0, 0, 0, 1, 0}, turned[8] = {1, 0, 0, 0, 0, 0, 0.2, 0};
    assert_refused(lstub_network_cascade(wall, turned, 1, 2, out, status, &err), LSTUB_E_NONE, err, "1 - a22 b11");
    assert_ok(lstub_network_cascade(wall, wall, 1, 2, out, status, &err), err);
    assert_same(out, wall, 2, 0.0, "nothing comes through a wall");
}
END_TEST

START_TEST(weak_fixtures)
{
    static const struct { double through; int32_t want; } weak[] = {{1e-3, LSTUB_OK}, {1e-6, LSTUB_W_RANGE}, {1e-8, LSTUB_E_NONE}, {0.0, LSTUB_E_NONE}};
    const double b[8] = {0.3, 0.1, 0.5, -0.2, 0.5, -0.2, -0.1, 0.2};
    for (size_t i = 0; i < COUNT(weak); i++)
        for (int right = 0; right <= 1; right++) {
            const double a[8] = {0.2, 0, weak[i].through, 0, weak[i].through, 0, 0.1, 0};
            double ab[8], out[8];
            int32_t status;
            lstub_error err;
            LSTUB_INIT(err);
            assert_ok(lstub_network_cascade(right ? b : a, right ? a : b, 1, 2, ab, NULL, &err), err);
            int32_t result = lstub_network_deembed(ab, right ? NULL : a, right ? a : NULL, 1, 2, out, &status, &err);
            ck_assert_msg(result == weak[i].want && status == result, "%g: %s", weak[i].through, lstub_status_name(result));
            if (result < 0)
                ck_assert(isnan(out[0]) && strstr(err.message, "transmission of left or right") != NULL && err.index == 0);
            else
                assert_same(out, b, 2, 1e-15 / (weak[i].through * weak[i].through), "deembed(cascade) to the condition's digits");
        }
}
END_TEST

START_TEST(bad_numbers)
{
    lstub_error err;
    int32_t status[3];
    const int32_t pair[2] = {0, 1};
    double s[24], x[24], z[2] = {50, 50};
    random_matrix(s, 2, 11, 1.0);
    memcpy(s + 8, s, 8 * sizeof *s);
    memcpy(s + 16, s, 8 * sizeof *s);
    s[8 + 5] = NAN;
    assert_refused(lstub_network_renormalise(s, 3, 2, z, z, x, status, &err), LSTUB_E_ARGUMENT, err, "item 1|s[1, 1, 0]|nan|finite");
    ck_assert_int_eq(err.index, 1);
    ck_assert(status[0] == LSTUB_OK && status[1] == LSTUB_E_ARGUMENT && status[2] == LSTUB_OK && isnan(x[8]) && isfinite(x[7]) && isfinite(x[16]));
    assert_refused(lstub_network_convert(s, 3, 2, 1, 2, NULL, x, NULL, &err), LSTUB_E_ARGUMENT, err, "in[1, 1, 0]");
    assert_refused(lstub_network_cascade(s, s, 3, 2, x, NULL, &err), LSTUB_E_ARGUMENT, err, "a[1, 1, 0]");
    assert_refused(lstub_network_cascade(s + 16, s + 8, 1, 2, x, NULL, &err), LSTUB_E_ARGUMENT, err, "b[0, 1, 0]");
    assert_refused(lstub_network_deembed(s, NULL, NULL, 3, 2, x, NULL, &err), LSTUB_E_ARGUMENT, err, "measured[1, 1, 0]");
    assert_refused(lstub_network_deembed(s + 16, s + 8, NULL, 1, 2, x, NULL, &err), LSTUB_E_ARGUMENT, err, "left[0, 1, 0]");
    assert_refused(lstub_network_deembed(s + 16, NULL, s + 8, 1, 2, x, NULL, &err), LSTUB_E_ARGUMENT, err, "right[0, 1, 0]");
    assert_refused(lstub_network_to_mixed(s, 3, 2, pair, 1, z, x, NULL, NULL, &err), LSTUB_E_ARGUMENT, err, "s[1, 1, 0]");
    assert_refused(lstub_network_to_single(s, 3, 2, pair, 1, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "s[1, 1, 0]");
    assert_refused(lstub_network_passivity(s, 3, 2, x, status, &err), LSTUB_E_ARGUMENT, err, "s[1, 1, 0]");
    ck_assert(isfinite(x[0]) && isnan(x[1]) && isfinite(x[2]));
    assert_refused(lstub_network_reciprocity(s, 3, 2, x, status, &err), LSTUB_E_ARGUMENT, err, "s[1, 1, 0]");
    s[13] = HUGE_VAL;
    assert_refused(lstub_network_passivity(s, 3, 2, x, status, &err), LSTUB_E_ARGUMENT, err, "s[1, 1, 0]|inf");
    s[13] = 1e200;
    assert_refused(lstub_network_passivity(s, 3, 2, x, status, &err), LSTUB_E_ARGUMENT, err, "s[1, 1, 0]|1e+200|<= 1e+30");
    s[0] = s[6] = 0.0;                                 /* no Z beside a number that is none */
    s[1] = s[7] = s[3] = s[5] = 0.0;
    s[2] = s[4] = 1.0;
    ck_assert_int_eq(lstub_network_convert(s, 3, 2, 1, 2, NULL, x, status, &err), LSTUB_E_MIXED);
    ck_assert(status[0] == LSTUB_E_NONE && status[1] == LSTUB_E_ARGUMENT && status[2] == LSTUB_OK && err.index == 0);
    memcpy(x, s + 16, 8 * sizeof *s);
    assert_ok(lstub_network_renormalise(x, 1, 2, z, z, x, NULL, &err), err);       /* in place */
    assert_same(x, s + 16, 2, 1e-15, "same references");
    assert_ok(lstub_network_cascade(NULL, NULL, 0, 2, NULL, NULL, &err), err);
}
END_TEST

START_TEST(bad_arguments)
{
    lstub_error err;
    double s[8] = {0.1, 0, 0.5, 0, 0.5, 0, 0.1, 0}, x[8], z[2] = {50, 50}, wrong[2] = {50, 0}, complex_z[4] = {50, 0, -1, 3}, y;
    int32_t pairs[4] = {0, 1, 1, 0};
    assert_refused(lstub_network_renormalise(s, 1, 0, z, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "p = 0|>= 1|16");
    assert_refused(lstub_network_renormalise(s, 1, 17, z, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "p = 17");
    assert_refused(lstub_network_renormalise(s, 1, 2, wrong, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "port 1|z_from = 0 ohm");
    wrong[1] = NAN;
    assert_refused(lstub_network_renormalise(s, 1, 2, z, wrong, x, NULL, &err), LSTUB_E_ARGUMENT, err, "port 1|z_to = nan ohm");
    assert_refused(lstub_network_renormalise(s, 1, 2, NULL, z, x, NULL, &err), LSTUB_E_NULL, err, "z_from");
    assert_refused(lstub_network_renormalise(NULL, 1, 2, z, z, x, NULL, &err), LSTUB_E_NULL, err, "s");
    assert_refused(lstub_network_renormalise(s, 1, 2, z, z, NULL, NULL, &err), LSTUB_E_NULL, err, "out");
    assert_refused(lstub_network_renormalise_complex(s, 1, 2, complex_z, complex_z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "item 0|port 1|z_from = -1 ohm");
    complex_z[2] = 50;
    complex_z[3] = HUGE_VAL;
    assert_refused(lstub_network_renormalise_complex(s, 1, 2, complex_z, complex_z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "z_from = inf ohm");
    assert_refused(lstub_network_convert(s, 1, 2, 0, 2, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "from = 0");
    assert_refused(lstub_network_convert(s, 1, 2, 1, 7, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "to = 7");
    assert_refused(lstub_network_convert(s, 1, 1, 1, 4, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "p = 1|even");
    assert_refused(lstub_network_convert(s, 1, 1, 5, 1, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "p = 1|must be 2");
    assert_refused(lstub_network_cascade(s, s, 1, 1, x, NULL, &err), LSTUB_E_ARGUMENT, err, "p = 1|even");
    assert_refused(lstub_network_cascade(s, NULL, 1, 2, x, NULL, &err), LSTUB_E_NULL, err, "b");
    assert_refused(lstub_network_deembed(s, s, s, 1, 3, x, NULL, &err), LSTUB_E_ARGUMENT, err, "p = 3|even");
    assert_refused(lstub_network_deembed(NULL, s, s, 1, 2, x, NULL, &err), LSTUB_E_NULL, err, "measured");
    assert_refused(lstub_network_to_mixed(s, 1, 2, pairs, 2, z, x, NULL, NULL, &err), LSTUB_E_ARGUMENT, err, "pair_count = 2|<= 1");
    assert_refused(lstub_network_to_mixed(s, 1, 2, pairs, -1, z, x, NULL, NULL, &err), LSTUB_E_ARGUMENT, err, "pair_count = -1");
    assert_refused(lstub_network_to_mixed(s, 1, 2, NULL, 1, z, x, NULL, NULL, &err), LSTUB_E_NULL, err, "pairs");
    pairs[1] = 0;
    assert_refused(lstub_network_to_mixed(s, 1, 2, pairs, 1, z, x, NULL, NULL, &err), LSTUB_E_ARGUMENT, err, "pair 0|port 0|one place");
    pairs[1] = 2;
    assert_refused(lstub_network_to_single(s, 1, 2, pairs, 1, z, x, NULL, &err), LSTUB_E_ARGUMENT, err, "pair 0|port 2|< 2");
    assert_refused(lstub_network_passivity(s, 1, 2, NULL, NULL, &err), LSTUB_E_NULL, err, "sigma");
    assert_refused(lstub_network_reciprocity(s, 1, -3, &y, NULL, &err), LSTUB_E_ARGUMENT, err, "p = -3");
}
END_TEST

START_TEST(stubs)
{
    lstub_error err;
    int32_t status[4];
    double out[32];
    const double zin[8] = {HUGE_VAL, 0, 1e308, -1e308, NAN, 0, -25, 0}, through[8] = {0, 0, 1, 0, 1, 0, 0, 0};
    LSTUB_INIT(err);
    ck_assert_int_eq(lstub_network_shunt(zin, 4, 50.0, out, status, &err), LSTUB_E_MIXED);
    ck_assert(err.index == 2 && strstr(err.message, "zin[2] = nan") != NULL);
    assert_same(out, through, 2, 0.0, "nothing there");
    assert_same(out + 8, through, 2, 0.0, "nothing there");
    ck_assert(status[0] == LSTUB_OK && status[1] == LSTUB_OK && status[2] == LSTUB_E_ARGUMENT && status[3] == LSTUB_E_NONE);
    assert_refused(lstub_network_shunt(zin, 1, 0.0, out, status, &err), LSTUB_E_ARGUMENT, err, "z_ref = 0 ohm");
    assert_refused(lstub_network_shunt(NULL, 1, 50.0, out, status, &err), LSTUB_E_NULL, err, "zin");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("network");
    TCase *values = tcase_create("table"), *identities = tcase_create("identities"), *input = tcase_create("input");
    read_table();
    tcase_add_loop_test(values, table, 0, (int)COUNT(functions));
    tcase_add_test(identities, cascade_identities);
    tcase_add_test(identities, chain_matrices);
    tcase_add_test(identities, unequal_references);
    tcase_add_test(identities, there_and_back);
    tcase_add_test(identities, references_of_each_frequency);
    tcase_add_test(identities, passive_networks);
    tcase_add_test(input, singular);
    tcase_add_test(input, weak_fixtures);
    tcase_add_test(input, bad_numbers);
    tcase_add_test(input, bad_arguments);
    tcase_add_test(input, stubs);
    suite_add_tcase(suite, values);
    suite_add_tcase(suite, identities);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
