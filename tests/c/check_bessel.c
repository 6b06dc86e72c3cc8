/* White-box: Bessel functions and elliptic integrals against tests/data/bessel.csv (tests/tools/make_bessel_table.py). */
#include "check_util.h"
#include "num/bessel.h"
#include "num/elliptic.h"

#define ROWS_MAX 6000
#define SOURCE   "mpmath, 40 digits: tests/data/bessel.csv"

typedef struct row {
    char   name[8];
    double x[2], value[2], scale;
} row;

static row    rows[ROWS_MAX];
static size_t row_count;

static void need(int fine, const char *line)
{
    if (!fine) {
        fprintf(stderr, "bessel.csv: cannot read '%s'\n", line);
        exit(EXIT_FAILURE);
    }
}

static void read_table(void)
{
    char  line[256];
    FILE *file = fopen(LSTUB_TEST_DATA "/bessel.csv", "r");
    need(file != NULL, "the file");
    while (fgets(line, sizeof line, file) != NULL) {
        row   *r = &rows[row_count];
        char  *at = strchr(line, ',');
        double numbers[5];
        if (line[0] == '#' || strncmp(line, "function,", 9) == 0)
            continue;
        need(at != NULL && (size_t)(at - line) < sizeof r->name && ++row_count < ROWS_MAX, line);
        memcpy(r->name, line, (size_t)(at - line));
        for (int i = 0; i < 5; i++) {
            char *from = at + 1;
            need(*at == ',', line);
            numbers[i] = strtod(from, &at);
            need(at != from, line);
        }
        memcpy(r->x, numbers, sizeof r->x);
        memcpy(r->value, numbers + 2, sizeof r->value);
        r->scale = numbers[4];
    }
    fclose(file);
    need(row_count > 1000, "enough rows");
}

static cplx real(double x) { return cplx_of(x, 0.0); }

/* One of several values by the digit, or by the letter, of its name. */
static cplx of_real(const row *r)
{
    int one = r->name[1] == '1';
    if (r->name[2] == 'e') {
        lstub__ik v;
        lstub__bessel_ik(r->x[0], &v);
        return real(r->name[0] == 'i' ? (one ? v.i1 : v.i0) : one ? v.k1 : v.k0);
    }
    lstub__jy v;
    lstub__bessel_jy(r->x[0], &v);
    return real(r->name[0] == 'j' ? (one ? v.j1 : v.j0) : one ? v.y1 : v.y0);
}

static cplx scaled(const row *r)
{
    cplx z = cplx_of(r->x[0], r->x[1]), orders[5];
    int n = r->name[2] - '0';
    if (n < 2) {
        lstub__zik v;
        lstub__bessel_zik(z, &v);
        return r->name[1] == 'i' ? (n ? v.i1 : v.i0) : n ? v.k1 : v.k0;
    }
    (r->name[1] == 'i' ? lstub__bessel_zin : lstub__bessel_zkn)(z, n, orders);
    return orders[n];
}

static cplx plain(const row *r)
{
    cplx z = cplx_of(r->x[0], r->x[1]), i0, k0;
    int one = r->name[2] == '1';
    if (r->name[1] == 'i' || r->name[1] == 'k') {
        lstub__bessel_zik0(z, &i0, &k0);
        return r->name[1] == 'i' ? i0 : k0;
    }
    lstub__zjy v;
    lstub__bessel_zjy(z, &v);
    return r->name[1] == 'j' ? (one ? v.j1 : v.j0) : r->name[1] == 'y' ? (one ? v.y1 : v.y0) : one ? v.h1 : v.h0;
}

static cplx ours(const row *r)
{
    double k, e;
    if (strncmp(r->name, "ell", 3) == 0) {
        lstub__elliptic(r->x[0], &k, &e);
        return real(r->name[3] == 'k' ? k : e);
    }
    if (r->name[0] != 'z')
        return of_real(r);
    return r->name[3] == 'e' ? scaled(r) : plain(r);
}

/* Names of the rows that start with it, the accuracy that the library is held to (elliptic.h states more for E). */
static const struct table {
    const char *start;
    double      rel;
} tables[] = {{"i0e", 1e-13}, {"i1e", 1e-13}, {"k0e", 1e-13}, {"k1e", 1e-13}, {"j", 1e-13},  {"y", 1e-13},  {"zi", 1e-13},
              {"zk", 1e-13},  {"zj", 1e-13},  {"zy", 1e-13},  {"zh", 1e-13},  {"ellk", 2e-15}, {"elle", 1e-13}};

START_TEST(table)
{
    double worst = 0.0;
    const row *at = NULL;
    size_t n = 0;
    for (size_t i = 0; i < row_count; i++) {
        const row *r = &rows[i];
        if (strncmp(r->name, tables[_i].start, strlen(tables[_i].start)) != 0)
            continue;
        if (r->name[0] == 'z' && r->name[2] > '1' && hypot(r->x[0], r->x[1]) > 1e3)
            continue;                   /* higher orders are for the rims of vias: a recurrence, not for so far out */
        cplx got = ours(r);
        double off = hypot((got.re - r->value[0]) / r->scale, (got.im - r->value[1]) / r->scale);
        n++;
        if (!(off <= worst)) {
            worst = off;
            at = r;
        }
    }
    ck_assert_msg(n >= 10, "%zu rows", n);
    ck_assert_msg(worst <= tables[_i].rel, "%s at %.17g %+.17gj: off by %.3g, %.3g is stated (%s)", at->name, at->x[0], at->x[1], worst,
                  tables[_i].rel, SOURCE);
}
END_TEST

/* I0 K1 + I1 K0 = 1/z, where the parts do not cancel: at arguments that no table has. */
START_TEST(wronskian)
{
    for (uint64_t i = 0; i < 3000; i++) {
        double r = pow(10.0, 8.0 * test_random(1, i) - 4.0), phi = (test_random(2, i) - 0.5) * 3.141592;
        cplx z = cplx_of(r * cos(phi), r * sin(phi)), one;
        lstub__zik v;
        lstub__ik x;
        lstub__bessel_zik(z, &v);
        one = cplx_mul(z, cplx_add(cplx_mul(v.i0, v.k1), cplx_mul(v.i1, v.k0)));
        assert_close(one.re, 1.0, 0, 4e-13, "identity: Wronskian");
        assert_close(one.im, 0.0, 0, 4e-13, "identity: Wronskian");
        lstub__bessel_ik(r, &x);
        assert_close(r * (x.i0 * x.k1 + x.i1 * x.k0), 1.0, 0, 3e-13, "identity: Wronskian");
    }
}
END_TEST

/* The same functions by other doors. */
START_TEST(doors)
{
    for (uint64_t i = 0; i < 500; i++) {
        double x = pow(10.0, 10.0 * test_random(3, i) - 6.0), i0, k0;
        cplx ke[4], ie[4];
        lstub__ik a;
        lstub__zik b;
        lstub__bessel_ik(x, &a);
        lstub__bessel_ik0(x, &i0, &k0);
        ck_assert(i0 == a.i0 && k0 == a.k0);
        lstub__bessel_zik(real(x), &b);
        assert_close(b.i1.re, a.i1, 2e-13, 0, "identity: complex argument without imaginary part");
        assert_close(b.k1.re, a.k1, 2e-13, 0, "identity: complex argument without imaginary part");
        lstub__bessel_zkn(real(x), 3, ke);
        lstub__bessel_zin(real(x), 3, ie);
        ck_assert(ke[1].re == b.k1.re && ie[0].re == b.i0.re);
        assert_close(ke[3].re, ke[1].re + 4.0 / x * ke[2].re, 1e-13, 0, "identity: recurrence");
    }
}
END_TEST

#define ALL_NAN4(v, a, b, c, d) ck_assert(isnan((v).a) && isnan((v).b) && isnan((v).c) && isnan((v).d))

static const double bad_real[] = {0.0, -1.0, -1e-300, 9e-301, 1.01e15, INFINITY, -INFINITY, NAN};
static const double bad_jy[] = {0.0, -1.0, 9e-151, 1.01e5, INFINITY, NAN};
static const cplx   bad_complex[] = {{0.0, 0.0}, {-1e-9, 1.0}, {-1.0, 0.0}, {9e-151, 0.0}, {1.01e5, 0.0}, {0.0, 1.01e5},
                                     {NAN, 0.0}, {1.0, NAN}, {INFINITY, 0.0}, {0.0, -INFINITY}};

START_TEST(out_of_range)
{
    for (size_t i = 0; i < COUNT(bad_real); i++) {
        lstub__ik v;
        double i0 = 0, k0 = 0;
        lstub__bessel_ik(bad_real[i], &v);
        ALL_NAN4(v, i0, i1, k0, k1);
        lstub__bessel_ik0(bad_real[i], &i0, &k0);
        ck_assert(isnan(i0) && isnan(k0));
    }
    for (size_t i = 0; i < COUNT(bad_jy); i++) {
        lstub__jy v;
        lstub__bessel_jy(bad_jy[i], &v);
        ALL_NAN4(v, j0, j1, y0, y1);
    }
    for (size_t i = 0; i < COUNT(bad_complex); i++) {
        lstub__zik v;
        cplx z = bad_complex[i], orders[3];
        lstub__bessel_zik(z, &v);
        ALL_NAN4(v, i0.re, i1.re, k0.re, k1.re);
        lstub__bessel_zkn(z, 2, orders);
        ck_assert(isnan(orders[0].re) && isnan(orders[2].re));
        if (!isfinite(z.re) || !isfinite(z.im))
            continue;
        lstub__bessel_zin(z, 2, orders);
        ck_assert(isnan(orders[0].re) && isnan(orders[2].re));
    }
    for (int i = 0; i < 4; i++) {
        static const double m1[] = {-1e-9, 1.0000001, NAN, INFINITY};
        double k = 0, e = 0;
        lstub__elliptic(m1[i], &k, &e);
        ck_assert(isnan(k) && isnan(e));
    }
    double k, e;
    lstub__elliptic(0.0, &k, &e);
    ck_assert(isinf(k) && e == 1.0);
}
END_TEST

int main(void)
{
    read_table();
    Suite *suite = suite_create("bessel");
    TCase *all = tcase_create("bessel");
    tcase_add_loop_test(all, table, 0, (int)COUNT(tables));
    tcase_add_test(all, wronskian);
    tcase_add_test(all, doors);
    tcase_add_test(all, out_of_range);
    suite_add_tcase(suite, all);
    return test_main(suite);
}
