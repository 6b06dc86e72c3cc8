/* The closed forms: limits and identities, and every argument refused where it should be. Values: check_values.c. */
#include "check_util.h"

#define C0  299792458.0
#define PI  3.14159265358979323846
#define MU0 (4e-7 * PI)

static lstub_error err;

static void setup(void) { LSTUB_INIT(err); }

/* ---- one way to call them all -------------------------------------------------------------------- */

#define ARGS 5
#define OUTS 3

typedef int32_t call(const double *x, double *const *out, lstub_error *e);
#define O out[0]
#define N(i) ((int32_t)x[i])

#define FORM(name, ...) static int32_t f_##name(const double *x, double *const *out, lstub_error *e) { return lstub_##name(__VA_ARGS__, e); }
FORM(quarter_wave_frequency, x[0], x[1], N(2), O)
FORM(quarter_wave_length, x[0], x[1], N(2), O)
FORM(quarter_wave_dk, x[0], x[1], N(2), O)
FORM(delay_dk, x[0], O)
FORM(loaded_stub_frequency, x[0], x[1], x[2], x[3], N(4), O)
FORM(notch_floor, x[0], x[1], x[2], N(3), O)
FORM(stub_skirt, x[0], x[1], x[2], O)
FORM(rule_of_thumb_length, x[0], O)
FORM(coax, x[0], x[1], x[2], O, out[1], out[2])
FORM(return_inductance, x[0], N(1), x[2], x[3], O)
FORM(twin_rod, x[0], x[1], x[2], O, out[1])
FORM(plate_capacitance, x[0], x[1], x[2], x[3], x[4], O)
FORM(handbook_capacitance, x[0], x[1], x[2], x[3], O)
FORM(handbook_inductance, x[0], x[1], O)

static const struct form {
    const char *name;
    call       *f;
    const char *arg[ARGS];             /* a '#' marks a whole number, a '0' one that may be zero */
    double      good[ARGS];
    int         outs, outs_optional;
} forms[] = {
    {"quarter_wave_frequency", f_quarter_wave_frequency, {"length", "dk", "#n"}, {1e-3, 4, 1}, 1, 0},
    {"quarter_wave_length", f_quarter_wave_length, {"f", "dk", "#n"}, {3e10, 4, 1}, 1, 0},
    {"quarter_wave_dk", f_quarter_wave_dk, {"f", "length", "#n"}, {3e10, 1e-3, 1}, 1, 0},
    {"delay_dk", f_delay_dk, {"delay"}, {7e-9}, 1, 0},
    {"loaded_stub_frequency", f_loaded_stub_frequency, {"length", "dk", "zs", "0end_capacitance", "#n"}, {1e-3, 4, 40, 1e-13, 1}, 1, 0},
    {"notch_floor", f_notch_floor, {"zs", "z0", "loss_tangent", "#n"}, {40, 50, 0.02, 1}, 1, 0},
    {"stub_skirt", f_stub_skirt, {"zs", "z0", "0f_over_f1"}, {40, 50, 0.5}, 1, 0},
    {"rule_of_thumb_length", f_rule_of_thumb_length, {"bit_rate"}, {1e10}, 1, 0},
    {"coax", f_coax, {"inner_diameter", "outer_diameter", "dk"}, {2.5e-4, 7.5e-4, 4}, 3, 1},
    {"return_inductance", f_return_inductance, {"drill", "#count", "distance", "return_drill"}, {2.5e-4, 4, 1e-3, 2.5e-4}, 1, 0},
    {"twin_rod", f_twin_rod, {"drill", "pitch", "dk"}, {2.5e-4, 1e-3, 4}, 2, 1},
    {"plate_capacitance", f_plate_capacitance, {"drill", "antipad", "spacing", "dk_through_plane", "dk_in_plane"},
     {2.5e-4, 7.5e-4, 2e-4, 4, 4}, 1, 0},
    {"handbook_capacitance", f_handbook_capacitance, {"thickness", "pad", "antipad", "dk"}, {1.6e-3, 5e-4, 8e-4, 4}, 1, 0},
    {"handbook_inductance", f_handbook_inductance, {"length", "diameter"}, {1.6e-3, 3e-4}, 1, 0},
};

/* Calls with one argument replaced; outputs are `outs` doubles full of poison. */
static int32_t call_with(const struct form *form, size_t arg, double value, double *outs)
{
    double x[ARGS], *out[OUTS] = {&outs[0], &outs[1], &outs[2]};
    memcpy(x, form->good, sizeof x);
    if (arg < ARGS)
        x[arg] = value;
    memset(outs, POISON, OUTS * sizeof *outs);
    LSTUB_INIT(err);
    return form->f(x, out, &err);
}

START_TEST(good_arguments)
{
    const struct form *form = &forms[_i];
    double outs[OUTS];
    ck_assert_msg(call_with(form, ARGS, 0, outs) == LSTUB_OK, "%s: %s", form->name, err.message);
    for (int i = 0; i < OUTS; i++)
        ck_assert_msg(poisoned(&outs[i], sizeof outs[i]) == (i >= form->outs), "%s: output %d", form->name, i);
}
END_TEST

/* NaN, infinity, zero and negative in every place: refused, named, nothing written. */
START_TEST(bad_arguments)
{
    const struct form *form = &forms[_i];
    const double bad[] = {NAN, INFINITY, -INFINITY, -1.5, 1e300, 0.0};
    double outs[OUTS];
    for (size_t arg = 0; arg < ARGS && form->arg[arg] != NULL; arg++) {
        int whole = form->arg[arg][0] == '#', zero = form->arg[arg][0] == '0';
        const char *name = form->arg[arg] + (whole || zero);
        for (size_t i = 0; i < COUNT(bad); i++) {
            double value = whole ? (bad[i] > 0 ? 2e9 : bad[i] < 0 ? -1 : 0) : bad[i];
            if (zero && value == 0.0)
                continue;
            ck_assert_msg(call_with(form, arg, value, outs) < 0, "%s: %s = %g accepted", form->name, name, value);
            ck_assert_msg(strstr(err.message, name) != NULL, "%s: %s = %g: '%s'", form->name, name, value, err.message);
            ck_assert_msg(strcmp(err.field, name) == 0, "%s: %s = %g: field '%s'", form->name, name, value, err.field);
            ck_assert_msg(poisoned(outs, sizeof outs), "%s: %s = %g: output written", form->name, name, value);
        }
    }
}
END_TEST

START_TEST(null_outputs)
{
    const struct form *form = &forms[_i];
    double *none[OUTS] = {NULL, NULL, NULL};
    int32_t status = form->f(form->good, none, &err);
    ck_assert_msg(status == (form->outs_optional ? LSTUB_OK : LSTUB_E_NULL), "%s: %s", form->name, lstub_status_name(status));
}
END_TEST

static const struct {
    const char *what;
    int         form;
    double      x[ARGS];
    const char *words;
} contradictions[] = {
    {"coax turned inside out", 8, {7e-4, 2e-4, 4}, "outer_diameter|0.0002|0.0007"},
    {"coax without room", 8, {7e-4, 7e-4, 4}, "outer_diameter|0.0007"},
    {"return via in the barrel", 9, {5e-4, 1, 3e-4, 2e-4}, "distance|0.0003"},
    {"return vias that touch", 9, {2e-4, 30, 5e-4, 2e-4}, "count|30|0.0005"},
    {"barrels that overlap", 10, {5e-4, 4e-4, 4}, "pitch|0.0004|0.0005"},
    {"drill wider than antipad", 11, {8e-4, 7e-4, 2e-4, 4, 4}, "antipad|0.0007|0.0008"},
    {"pad over antipad", 12, {1.6e-3, 9e-4, 8e-4, 4}, "antipad|0.0008|0.0009"},
};

START_TEST(contradicting_arguments)
{
    double outs[OUTS], *out[OUTS] = {&outs[0], &outs[1], &outs[2]};
    memset(outs, POISON, sizeof outs);
    assert_refused(forms[contradictions[_i].form].f(contradictions[_i].x, out, &err), LSTUB_E_GEOMETRY, err, contradictions[_i].words);
    ck_assert(poisoned(outs, sizeof outs));
}
END_TEST

START_TEST(even_numbers_of_a_null)
{
    double v;
    for (int32_t n = 2; n < 12; n += 2) {
        assert_refused(lstub_quarter_wave_frequency(1e-3, 4, n, &v, &err), LSTUB_E_ARGUMENT, err, "n =|odd");
        assert_refused(lstub_quarter_wave_length(1e10, 4, n, &v, &err), LSTUB_E_ARGUMENT, err, "n =|odd");
        assert_refused(lstub_quarter_wave_dk(1e10, 1e-3, n, &v, &err), LSTUB_E_ARGUMENT, err, "n =|odd");
        assert_refused(lstub_notch_floor(50, 50, 0.02, n, &v, &err), LSTUB_E_ARGUMENT, err, "n =|odd");
    }
}
END_TEST

/* ---- limits and identities ----------------------------------------------------------------------- */

START_TEST(quarter_wave_there_and_back)
{
    for (uint64_t i = 0; i < 200; i++) {
        double  length = 1e-4 * pow(100.0, test_random(1, i)), dk = 1.0 + 9.0 * test_random(2, i), f, back, f1;
        int32_t n = 1 + 2 * (int32_t)(5 * test_random(3, i));
        assert_ok(lstub_quarter_wave_frequency(length, dk, n, &f, &err), err);
        assert_ok(lstub_quarter_wave_frequency(length, dk, 1, &f1, &err), err);
        assert_close(f, n * f1, 1e-15, 0, "identity: odd multiples");
        assert_ok(lstub_quarter_wave_length(f, dk, n, &back, &err), err);
        assert_close(back, length, 1e-14, 0, "identity: solved for the length");
        assert_ok(lstub_quarter_wave_dk(f, length, n, &back, &err), err);
        assert_close(back, dk, 1e-14, 0, "identity: solved for Dk");
        assert_ok(lstub_quarter_wave_frequency(2 * length, dk, n, &back, &err), err);
        assert_close(back, f / 2, 1e-15, 0, "identity: longer stub, lower notch");
    }
}
END_TEST

START_TEST(faster_than_light_is_told)
{
    double dk = NAN;
    LSTUB_INIT(err);
    ck_assert_int_eq(lstub_quarter_wave_dk(C0, 1.0, 1, &dk, &err), LSTUB_W_RANGE);
    assert_close(dk, 1.0 / 16, 1e-15, 0, "identity");
    ck_assert_int_eq(err.status, LSTUB_W_RANGE);
    ck_assert_str_ne(err.message, "");
    ck_assert_int_eq(lstub_delay_dk(0.5 / C0, &dk, &err), LSTUB_W_RANGE);
    assert_close(dk, 0.25, 1e-15, 0, "identity");
    assert_ok(lstub_delay_dk(2.0 / C0, &dk, &err), err);
    assert_close(dk, 4.0, 1e-15, 0, "identity");
}
END_TEST

START_TEST(loaded_stub_limits)
{
    double f, ideal, before = 0.0;
    for (int32_t n = 1; n <= 5; n++) {
        assert_ok(lstub_loaded_stub_frequency(1e-3, 4, 40, 0, n, &f, &err), err);
        assert_ok(lstub_quarter_wave_frequency(1e-3, 4, 2 * n - 1, &ideal, &err), err);
        assert_close(f, ideal, 1e-14, 0, "limit: no capacitance");
        assert_ok(lstub_loaded_stub_frequency(1e-3, 4, 40, 1e-18, n, &f, &err), err);
        ck_assert(f < ideal);
        assert_close(f, ideal, 1e-3, 0, "limit: next to no capacitance");
        assert_ok(lstub_loaded_stub_frequency(1e-3, 4, 40, 1e-8, n, &f, &err), err);
        assert_close(f, (n - 1) * C0 / 4e-3, n == 1 ? 0 : 1e-3, n == 1 ? 1e9 : 0, "limit: the end shorted by a large capacitance");
    }
    for (int i = 0; i < 40; i++) {
        double ce = 1e-12 * pow(10.0, -0.1 * i), theta;
        assert_ok(lstub_loaded_stub_frequency(2.54e-3, 4, 40, ce, 1, &f, &err), err);
        ck_assert(f > before);
        before = f;
        theta = 2 * PI * f * 2.54e-3 * 2 / C0;
        assert_close(2 * PI * f * ce * 40 * tan(theta), 1.0, 1e-11, 0, "identity: the equation it solves");
    }
    assert_ok(lstub_loaded_stub_frequency(2.54e-3, 4, 40, 1e-13, 1, &f, &err), err);
    assert_close(f, 11.936e9, 0.01, 0, "first order of the open-end correction (Pozar), derived");
}
END_TEST

/* The floor is the shunt impedance of a lossy line at its quarter wave; the skirt that of a loss-free line. */
START_TEST(floor_and_skirt_are_a_shunt_line)
{
    for (int i = 1; i <= 20; i++) {
        double zs = 10.0 + 5.0 * i, db, x = i / 21.0, reactance, z, at_half;
        assert_ok(lstub_stub_skirt(zs, 50, x, &db, &err), err);
        reactance = zs / tan(0.5 * PI * x);
        assert_close(db, -20 * log10(2 * reactance / hypot(50, 2 * reactance)), 1e-12, 0, "S21 = 2 Zin/(2 Zin + Z0)");
        assert_ok(lstub_notch_floor(zs, 50, 1e-3 * i, 1, &db, &err), err);
        z = zs * tanh(PI * 1e-3 * i / 4);
        assert_close(db, 20 * log10(2 * z / (2 * z + 50)), 1e-12, 0, "S21 = 2 Zin/(2 Zin + Z0)");
        assert_ok(lstub_notch_floor(zs, 50, 1e-3 * i, 3, &at_half, &err), err);
        ck_assert(at_half > db);        /* higher nulls are shallower */
    }
    double db;
    assert_ok(lstub_stub_skirt(40, 50, 0.0, &db, &err), err);
    assert_close(db, 0.0, 0, 0, "limit: no stub at zero frequency");
    for (double zs = 20; zs < 100; zs += 7) {
        assert_ok(lstub_stub_skirt(zs, 50, 2 / PI * atan(2 * zs / 50), &db, &err), err);
        assert_close(db, 10 * log10(2.0), 1e-12, 0, "derived: half power at (2/pi) atan(2 Zs/Z0)");
    }
}
END_TEST

START_TEST(lines)
{
    double c, l, z, l2, z2;
    for (uint64_t i = 0; i < 100; i++) {
        double a = 1e-4 * (1 + 5 * test_random(4, i)), b = a * (1.01 + 9 * test_random(5, i)), dk = 1 + 9 * test_random(6, i);
        assert_ok(lstub_coax(a, b, dk, &c, &l, &z, &err), err);
        assert_close(C0 * C0 * l * c, dk, 1e-13, 0, "identity: c^2 L' C' = Dk");
        assert_close(z, sqrt(l / c), 1e-13, 0, "identity: Z = sqrt(L'/C')");
        assert_ok(lstub_twin_rod(a, b, dk, &l, &z, &err), err);
        assert_close(z, 2 * C0 * l / sqrt(dk), 1e-13, 0, "identity: Zdiff/2 = c L'/sqrt(Dk)");
    }
    assert_ok(lstub_twin_rod(1e-5, 1e-2, 4, &l, &z, &err), err);
    assert_close(l, MU0 / (2 * PI) * log(2e3), 1e-6, 0, "limit: wide pair, ln(2 s/d)");
    assert_ok(lstub_return_inductance(1e-5, 1, 1e-2, 1e-5, &l2, &err), err);
    assert_close(l2, 2 * l, 1e-6, 0, "limit: one return via is the two-wire line");
    assert_ok(lstub_return_inductance(2e-4, 24, 1e-3, 1e-3 * 2 / 24, &l2, &err), err);
    assert_ok(lstub_coax(2e-4, 2e-3, 4, NULL, &l, &z2, &err), err);
    assert_close(l2, l, 1e-12, 0, "identity: M r_g = s is the closed wall");
}
END_TEST

START_TEST(more_returns_less_inductance)
{
    double before = INFINITY, l;
    for (int32_t n = 1; n <= 8; n++) {
        assert_ok(lstub_return_inductance(2.54e-4, n, 1e-3, 2.54e-4, &l, &err), err);
        ck_assert(l < before);
        before = l;
    }
}
END_TEST

START_TEST(plate_capacitance_limits)
{
    double c, coax, twice, square;
    for (uint64_t i = 0; i < 100; i++) {
        double d = 1e-4 * (1 + 4 * test_random(7, i)), b = d * (1.2 + 3 * test_random(8, i));
        double h = 2e-5 * pow(100, test_random(9, i)), ez = 2 + 4 * test_random(10, i), er = ez * (0.8 + 0.5 * test_random(11, i));
        assert_ok(lstub_plate_capacitance(d, b, h, ez, er, &c, &err), err);
        assert_ok(lstub_coax(d, b, er, &coax, NULL, NULL, &err), err);
        ck_assert(c > 0 && c <= 0.5 * coax * h * (1 + 1e-14));
        assert_ok(lstub_plate_capacitance(2 * d, 2 * b, 2 * h, ez, er, &twice, &err), err);
        assert_close(twice, 2 * c, 1e-12, 0, "identity: scale");
        assert_ok(lstub_plate_capacitance(d, b, h * sqrt(er / ez), sqrt(er * ez), sqrt(er * ez), &square, &err), err);
        assert_close(square, c, 1e-12, 0, "identity: a uniaxial board is an isotropic one with its height scaled");
    }
    assert_ok(lstub_plate_capacitance(2.5e-4, 7.5e-4, 1e-6, 4, 4, &c, &err), err);
    assert_ok(lstub_coax(2.5e-4, 7.5e-4, 4, &coax, NULL, NULL, &err), err);
    assert_close(c, 0.5 * coax * 1e-6, 1e-12, 0, "limit: a thin cell is half a coax");
}
END_TEST

START_TEST(handbook_scaling)
{
    double a, b;
    assert_ok(lstub_handbook_capacitance(1e-3, 5e-4, 8e-4, 4, &a, &err), err);
    assert_ok(lstub_handbook_capacitance(2e-3, 5e-4, 8e-4, 2, &b, &err), err);
    assert_close(a, b, 1e-14, 0, "identity: C goes with thickness and Dk");
    assert_ok(lstub_handbook_inductance(1e-3, 3e-4, &a, &err), err);
    assert_ok(lstub_handbook_inductance(2e-3, 6e-4, &b, &err), err);
    assert_close(b, 2 * a, 1e-14, 0, "identity: scale");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("formulas");
    TCase *input = tcase_create("input"), *truth = tcase_create("identities");
    tcase_add_checked_fixture(input, setup, NULL);
    tcase_add_checked_fixture(truth, setup, NULL);
    tcase_add_loop_test(input, good_arguments, 0, (int)COUNT(forms));
    tcase_add_loop_test(input, bad_arguments, 0, (int)COUNT(forms));
    tcase_add_loop_test(input, null_outputs, 0, (int)COUNT(forms));
    tcase_add_loop_test(input, contradicting_arguments, 0, (int)COUNT(contradictions));
    tcase_add_test(input, even_numbers_of_a_null);
    tcase_add_test(truth, quarter_wave_there_and_back);
    tcase_add_test(truth, faster_than_light_is_told);
    tcase_add_test(truth, loaded_stub_limits);
    tcase_add_test(truth, floor_and_skirt_are_a_shunt_line);
    tcase_add_test(truth, lines);
    tcase_add_test(truth, more_returns_less_inductance);
    tcase_add_test(truth, plate_capacitance_limits);
    tcase_add_test(truth, handbook_scaling);
    suite_add_tcase(suite, input);
    suite_add_tcase(suite, truth);
    return test_main(suite);
}
