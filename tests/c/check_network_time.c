/* Step responses and impedance against time where they are known in closed form, causality, insertion loss deviation. */
#include "check_network.h"

#include <complex.h>

#define PI    3.14159265358979323846
#define MOST  2001
#define TIMES 300
#define C0    299792458.0

typedef double _Complex number;

static double freq[MOST], s[2 * MOST], t[TIMES], got[TIMES];
static size_t n;

static void even(double first, double step, double last)
{
    for (n = 0; n < MOST && first + (double)n * step <= last * (1.0 + 1e-12); n++)
        freq[n] = first + (double)n * step;
}

static void logarithmic(double first, double last, size_t count)
{
    for (n = 0; n < count; n++)
        freq[n] = first * pow(last / first, (double)n / (double)(count - 1));
}

typedef number response(double f);

static void fill(response *h)
{
    for (size_t i = 0; i < n; i++) {
        number x = h(freq[i]);
        s[2 * i] = creal(x);
        s[2 * i + 1] = cimag(x);
    }
}

#define RISE  40e-12
#define SIGMA (RISE / 1.6832424671458286)      /* 20 to 80 percent of an integrated Gaussian: 2 x 0.84162123 sigma */

static double edge(double at) { return 0.5 * erfc(-at / SIGMA / sqrt(2.0)); }

/* A matched delay; an open, a short at its end; a capacitor across a line; a piece of another line in a line. */
#define DELAY 700e-12
#define TAU   25e-12           /* C z0/2: 1 pF across 50 ohm */
#define PIECE 150e-12
#define GAMMA ((80.0 - 50.0) / (80.0 + 50.0))

static number delayed(double f) { return cexp(-2.0 * PI * I * f * DELAY); }
static number shorted(double f) { return -cexp(-4.0 * PI * I * f * PIECE); }
static number opened(double f) { return cexp(-4.0 * PI * I * f * PIECE); }
static number capacitor(double f)
{
    number x = 2.0 * PI * I * f * TAU;
    return -x / (1.0 + x);
}
static number piece(double f)
{
    number e = cexp(-4.0 * PI * I * f * PIECE);
    return GAMMA * (1.0 - e) / (1.0 - GAMMA * GAMMA * e);
}

static double delayed_step(double at) { return edge(at - DELAY); }
static double capacitor_step(double at)     /* -e^(-t/tau) after an edge of no width, over the Gaussian */
{
    return at < -8.0 * SIGMA ? 0.0 : -0.5 * exp(SIGMA * SIGMA / (2.0 * TAU * TAU) - at / TAU) * erfc((SIGMA / TAU - at / SIGMA) / sqrt(2.0));
}
static double piece_step(double at)
{
    double sum = GAMMA * edge(at), part = GAMMA * (1.0 - GAMMA * GAMMA);
    for (int k = 1; k < 40; k++, part *= GAMMA * GAMMA)
        sum -= part * edge(at - 2.0 * k * PIECE);
    return sum;
}

static const struct known {
    const char *what;
    response   *h;
    double    (*step)(double);
} known[] = {{"delay", delayed, delayed_step}, {"capacitor", capacitor, capacitor_step}, {"piece of line", piece, piece_step}};

static void times(double first, double last)
{
    for (int k = 0; k < TIMES; k++)
        t[k] = first + (last - first) * k / (TIMES - 1);
}

static double worst_off(const struct known *x, double scale)
{
    lstub_error err;
    double worst = 0.0;
    LSTUB_INIT(err);
    fill(x->h);
    for (size_t i = 0; i < n; i++)
        freq[i] *= scale;
    assert_ok(lstub_step_response(freq, s, n, 1, 0, 0, RISE, t, TIMES, got, &err), err);
    for (int k = 0; k < TIMES; k++)
        worst = fmax(worst, fabs(got[k] - x->step(t[k])));
    return worst;
}

/* On its own grid from 0: what the edge's spectrum beyond the band leaves, 3e-20 here, and rounding. */
START_TEST(steps_exact)
{
    times(-1e-9, 5e-9);
    even(0.0, 50e6, 100e9);
    ck_assert_msg(worst_off(&known[_i], 1.0) < 1e-12, "%s: off by %.3g", known[_i].what, worst_off(&known[_i], 1.0));
}
END_TEST

/* Extrapolated to 0 and interpolated: bounds are what a response of this length allows, not rounding. */
START_TEST(steps_of_other_grids)
{
    const struct known *x = &known[_i];
    times(-0.2e-9, 3e-9);
    even(50e6, 50e6, 100e9);           /* only 0 is missing */
    ck_assert_msg(worst_off(x, 1.0) < 1e-6, "%s: off by %.3g", x->what, worst_off(x, 1.0));
    even(300e3, 62.5e6, 100e9);        /* an offset */
    ck_assert_msg(worst_off(x, 1.0) < 1e-6, "%s: off by %.3g", x->what, worst_off(x, 1.0));
    even(250e6, 50e6, 100e9);          /* the first four missing */
    ck_assert_msg(worst_off(x, 1.0) < 1e-3, "%s: off by %.3g", x->what, worst_off(x, 1.0));
    logarithmic(1e6, 100e9, 1200);
    ck_assert_msg(worst_off(x, 1.0) < 1e-4, "%s: off by %.3g", x->what, worst_off(x, 1.0));
    even(50e6, 50e6, 100e9);           /* as printed with few digits: points are a little beside the grid */
    ck_assert_msg(worst_off(x, 1.0 + 1e-10) < 1e-6, "%s: off by %.3g", x->what, worst_off(x, 1.0 + 1e-10));
    even(50e6, 50e6, 100e9);
    for (size_t i = 0; i < n; i++)
        freq[i] += 2e4 * sin((double)i);
    ck_assert_msg(worst_off(x, 1.0) < 1e-6, "%s: off by %.3g", x->what, worst_off(x, 1.0));
}
END_TEST

/* What is extrapolated to 0 leans on points far enough apart: noise of the next one hardly moves where a step settles. */
START_TEST(noise_at_the_lowest_frequencies)
{
    lstub_error err;
    double before, after;
    const double late = 10e-9;
    LSTUB_INIT(err);
    even(250e6, 50e6, 100e9);
    fill(delayed);
    assert_ok(lstub_step_response(freq, s, n, 1, 0, 0, RISE, &late, 1, &before, &err), err);
    s[2] *= 1.001;
    s[3] *= 1.001;
    assert_ok(lstub_step_response(freq, s, n, 1, 0, 0, RISE, &late, 1, &after, &err), err);
    ck_assert_msg(fabs(after - before) < 5e-4, "moved by %g", after - before);
}
END_TEST

START_TEST(impedances)
{
    lstub_error err;
    double z[4];
    const double at[4] = {-200e-12, PIECE, 2.0 * PIECE - 100e-12, 1.5e-9}, later[2] = {PIECE, 2.0 * PIECE + 200e-12};
    LSTUB_INIT(err);
    even(0.0, 50e6, 100e9);
    fill(piece);
    assert_ok(lstub_tdr(freq, s, n, 1, 0, 50.0, RISE, at, 4, z, &err), err);
    assert_close(z[0], 50.0, 1e-9, 0.0, "nothing before the edge");
    assert_close(z[1], 80.0, 1e-8, 0.0, "plateau of the piece");
    assert_close(z[2], 80.0, 1e-4, 0.0, "plateau, 4 sigma before its end");
    assert_close(z[3], 50.0, 1e-4, 0.0, "what follows; reflections there and back have died down");
    fill(shorted);
    assert_ok(lstub_tdr(freq, s, n, 1, 0, 50.0, RISE, later, 2, z, &err), err);
    assert_close(z[0], 50.0, 1e-7, 0.0, "the line before the end");
    assert_close(z[1], 0.0, 0.0, 1e-6, "a short");
    fill(opened);
    assert_ok(lstub_tdr(freq, s, n, 1, 0, 50.0, RISE, later, 2, z, &err), err);
    ck_assert_msg(z[1] > 1e6, "an open: %g", z[1]);
    for (size_t i = 0; i < n; i++)
        s[2 * i] *= 1.1, s[2 * i + 1] *= 1.1;          /* no passive load: rho is 1.1 */
    assert_ok(lstub_tdr(freq, s, n, 1, 0, 50.0, RISE, later, 2, z, &err), err);
    ck_assert(z[1] == HUGE_VAL);
}
END_TEST

/* The dip of a capacitor has the area C z0/2, whatever the edge. */
START_TEST(area_of_a_capacitor)
{
    lstub_error err;
    LSTUB_INIT(err);
    even(0.0, 50e6, 100e9);
    fill(capacitor);
    times(-0.5e-9, 1.5e-9);
    for (double rise = 20e-12; rise < 200e-12; rise *= 2.0) {
        double area = 0.0;
        assert_ok(lstub_step_response(freq, s, n, 1, 0, 0, rise, t, TIMES, got, &err), err);
        for (int k = 0; k < TIMES; k++)
            area += got[k] * (t[1] - t[0]);
        assert_close(area, -TAU, 1e-6, 0.0, "derived: d S11/d(jw) at 0");
    }
}
END_TEST

/* Entry [1, 0] of a 2-port, and NaN elsewhere does not matter to it. */
START_TEST(entries)
{
    static double two[8 * MOST];
    lstub_error err;
    double one[TIMES];
    LSTUB_INIT(err);
    even(0.0, 100e6, 100e9);
    times(-0.2e-9, 3e-9);
    fill(delayed);
    for (size_t i = 0; i < 8 * n; i++)
        two[i] = NAN;
    for (size_t i = 0; i < n; i++)
        memcpy(two + 8 * i + 4, s + 2 * i, 2 * sizeof *s);
    assert_ok(lstub_step_response(freq, s, n, 1, 0, 0, RISE, t, TIMES, one, &err), err);
    assert_ok(lstub_step_response(freq, two, n, 2, 1, 0, RISE, t, TIMES, got, &err), err);
    for (int k = 0; k < TIMES; k++)
        ck_assert(got[k] == one[k]);
    assert_refused(lstub_step_response(freq, two, n, 2, 0, 1, RISE, t, TIMES, got, &err), LSTUB_E_ARGUMENT, err, "s[0, 0, 1]|nan|finite");
    assert_ok(lstub_step_response(freq, s, n, 1, 0, 0, RISE, t, TIMES, t, &err), err);     /* in place of the times */
    for (int k = 0; k < TIMES; k++)
        ck_assert(t[k] == one[k]);
}
END_TEST

START_TEST(step_input)
{
    lstub_error err;
    double x[2], early, resolution;
    const double at[2] = {0.0, 1.0}, nan_at[1] = {NAN};
    even(0.0, 100e6, 50e9);
    fill(delayed);
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, 15e-12, at, 1, x, &err), LSTUB_W_RANGE, err, "rise_time = 1.5e-11 s|2e-11 s|5e+10 Hz");
    ck_assert(isfinite(x[0]));
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, at, 2, x, &err), LSTUB_W_RANGE, err, "t[1] = 1 s|1e+08 Hz");
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, nan_at, 1, x, &err), LSTUB_E_ARGUMENT, err, "item 0|t = nan s");
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, 0.0, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "rise_time = 0 s|> 0");
    assert_refused(lstub_step_response(freq, s, n, 1, 1, 0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "to = 1|< 1");
    assert_refused(lstub_step_response(freq, s, n, 1, 0, -1, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "from = -1");
    assert_refused(lstub_step_response(freq, s, 3, 1, 0, 0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "n = 3|>= 4");
    assert_refused(lstub_step_response(freq, s, n, 17, 0, 0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "p = 17");
    assert_refused(lstub_step_response(NULL, s, n, 1, 0, 0, RISE, at, 1, x, &err), LSTUB_E_NULL, err, "freq");
    assert_refused(lstub_step_response(freq, NULL, n, 1, 0, 0, RISE, at, 1, x, &err), LSTUB_E_NULL, err, "s");
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, NULL, 1, x, &err), LSTUB_E_NULL, err, "t");
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, at, 1, NULL, &err), LSTUB_E_NULL, err, "out");
    assert_ok(lstub_step_response(freq, s, n, 1, 0, 0, RISE, NULL, 0, NULL, &err), err);
    assert_refused(lstub_tdr(freq, s, n, 1, 1, 50.0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "port = 1");
    assert_refused(lstub_tdr(freq, s, n, 1, 0, -50.0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "z_ref = -50 ohm");
    assert_refused(lstub_network_causality(freq, s, n, 1, 6e-9, &early, &resolution, &err), LSTUB_E_ARGUMENT, err, "t0 = 6e-09 s|5e-09 s");
    assert_refused(lstub_network_causality(freq, s, n, 1, -1e-9, &early, &resolution, &err), LSTUB_E_ARGUMENT, err, "t0 = -1e-09 s");
    assert_refused(lstub_network_causality(freq, s, n, 1, 0.0, NULL, &resolution, &err), LSTUB_E_NULL, err, "early");
    freq[7] = freq[6];
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "freq[7]|> freq[6]");
    freq[7] = -1.0;
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "item 7|freq = -1 Hz");
    even(30e9, 100e6, 50e9);
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, at, 1, x, &err), LSTUB_E_ARGUMENT, err, "freq[0] = 3e+10 Hz|half of the last");
    even(5e9, 100e6, 50e9);
    assert_refused(lstub_step_response(freq, s, n, 1, 0, 0, RISE, at, 1, x, &err), LSTUB_W_RANGE, err, "freq[0] = 5e+09 Hz|guess");
}
END_TEST

static double early_of(response *h, double t0)
{
    lstub_error err;
    double early, resolution;
    LSTUB_INIT(err);
    fill(h);
    assert_ok(lstub_network_causality(freq, s, n, 1, t0, &early, &resolution, &err), err);
    assert_close(resolution, 1.6682414666523750 / freq[n - 1], 1e-12, 0.0, "first zero of the window: sqrt(pi^2 + 100)/(2 pi)");
    return early;
}

static number advanced(double f) { return cexp(2.0 * PI * I * f * 50e-12); }

/* Half a metre in a dielectric of Dk 4 and loss tangent 0.02: the wideband model, and the same two numbers at all
** frequencies, which nothing causal has. */
static number wideband_line(double f)
{
    lstub_dielectric d;
    double eps[2];
    LSTUB_INIT(d);
    d.dk = 4.0;
    d.loss_tangent = 0.02;
    ck_assert_int_eq(lstub_dielectric_permittivity(&d, &f, 1, eps, NULL, NULL), LSTUB_OK);
    return cexp(-2.0 * PI * I * f / C0 * 0.5 * csqrt(eps[0] + I * eps[1]));
}
static number constant_line(double f) { return cexp(-2.0 * PI * I * f / C0 * 0.5 * csqrt(4.0 * (1.0 - 0.02 * I))); }

START_TEST(causality)
{
    even(50e6, 50e6, 100e9);
    ck_assert_double_lt(early_of(delayed, 0.0), 1e-7);
    ck_assert_double_lt(early_of(delayed, DELAY), 1e-7);
    ck_assert_double_gt(early_of(delayed, DELAY + 50e-12), 0.99);
    ck_assert_double_gt(early_of(advanced, 0.0), 0.99);
    ck_assert_double_lt(early_of(capacitor, 0.0), 1e-7);
    ck_assert_double_lt(early_of(piece, 0.0), 1e-7);
    double f = 1e12, eps[2];
    lstub_dielectric d;
    LSTUB_INIT(d);
    d.dk = 4.0;
    d.loss_tangent = 0.02;
    ck_assert_int_eq(lstub_dielectric_permittivity(&d, &f, 1, eps, NULL, NULL), LSTUB_OK);
    double least = 0.5 / C0 * sqrt(eps[0]);            /* the front is faster than that only above 1 THz */
    ck_assert_double_lt(early_of(wideband_line, least), 1e-6);
    ck_assert_double_gt(early_of(constant_line, 0.98 * 0.5 / C0 * 2.0), 1e-3);
    for (size_t i = 0; i < 2 * n; i++)
        s[i] = 0.0;
    double early = 1.0, resolution;
    ck_assert_int_eq(lstub_network_causality(freq, s, n, 1, 0.0, &early, &resolution, NULL), LSTUB_OK);
    ck_assert(early == 0.0);
}
END_TEST

static double loss[MOST], deviation[MOST];

/* A loss of just these terms has no deviation, and gives them back. */
START_TEST(loss_of_its_own_form)
{
    lstub_error err;
    lstub_loss_fit fit;
    lstub_loss_deviation out;
    LSTUB_INIT(err);
    even(10e6, 10e6, 15e9);
    for (int constant = 0; constant <= 1; constant++)
        for (int weighted = 0; weighted <= 1; weighted++) {
            LSTUB_INIT(fit);
            LSTUB_INIT(out);
            fit.constant = constant;
            fit.weighted = weighted;
            for (size_t i = 0; i < n; i++)
                loss[i] = 0.25 * constant + 3e-5 * sqrt(freq[i]) + 4e-10 * freq[i] + 5e-20 * freq[i] * freq[i];
            assert_ok(lstub_insertion_loss_deviation(freq, loss, n, &fit, deviation, &out, &err), err);
            assert_close(out.a0, 0.25 * constant, 0.0, 1e-12, "the loss's own");
            assert_close(out.a1, 3e-5, 1e-11, 0.0, "the loss's own");
            assert_close(out.a2, 4e-10, 1e-11, 0.0, "the loss's own");
            assert_close(out.a4, 5e-20, 1e-11, 0.0, "the loss's own");
            ck_assert(out.rms < 1e-12 && out.greatest < 1e-12 && isnan(out.fom) && (size_t)out.points == n);
        }
}
END_TEST

/* Ripples and noise, against NumPy's least squares. */
START_TEST(loss_table)
{
    int found = 0;
    for (size_t i = 0; i < case_count; i++) {
        const lines *c = &cases[i];
        if (strcmp(c->function, "loss") != 0)
            continue;
        lstub_error err;
        lstub_loss_fit fit;
        lstub_loss_deviation out;
        LSTUB_INIT(err);
        LSTUB_INIT(fit);
        LSTUB_INIT(out);
        const double *want = get(c, "want", 8), *given = get(c, "fit", 7);
        fit.f_low = given[0];
        fit.f_high = given[1];
        fit.constant = (int32_t)given[2];
        fit.weighted = (int32_t)given[3];
        fit.symbol_rate = given[4];
        fit.transition_time = given[5];
        fit.receiver_bandwidth = given[6];
        assert_ok(lstub_insertion_loss_deviation(get(c, "freq", 60), get(c, "loss", 60), 60, &fit, NULL, &out, &err), err);
        const double is[8] = {out.a0, out.a1, out.a2, out.a4, out.rms, out.greatest, out.fom, (double)out.points};
        for (int k = 0; k < 8; k++)
            assert_close(is[k], want[k], 1e-9, 0.0, SOURCE);
        found++;
    }
    ck_assert_int_ge(found, 4);
}
END_TEST

/* A measured backplane: 0.655 dB of ripple by long stubs, fit without a constant, 0.05 to 5.156 GHz, all alike. */
START_TEST(loss_of_a_channel)
{
    lstub_error err;
    lstub_loss_fit fit;
    lstub_loss_deviation out;
    double re, im;
    FILE *file = fopen(LSTUB_TEST_DATA "/channels/backplane_long_stub_sdd21.csv", "r");
    ck_assert_msg(file != NULL, "tests/data/channels/backplane_long_stub_sdd21.csv cannot be read");
    ck_assert_int_eq(fscanf(file, "%*[^\n]"), 0);         /* the names of its columns */
    for (n = 0; n < MOST && fscanf(file, "%lf,%lf,%lf", &freq[n], &re, &im) == 3; n++)
        loss[n] = -20.0 * log10(hypot(re, im));
    fclose(file);
    LSTUB_INIT(err);
    LSTUB_INIT(fit);
    LSTUB_INIT(out);
    fit.f_low = 0.05e9;
    fit.f_high = 5.156e9;
    assert_ok(lstub_insertion_loss_deviation(freq, loss, n, &fit, deviation, &out, &err), err);
    ck_assert_uint_eq(n, 1496);
    assert_close(out.rms, 0.655, 0.0, 0.0005, "stated with the channels, derived from the measurement");
    ck_assert(isnan(deviation[n - 1]) && isfinite(deviation[0]) && out.points == 511);
}
END_TEST

START_TEST(loss_input)
{
    lstub_error err;
    lstub_loss_fit fit;
    lstub_loss_deviation out;
    LSTUB_INIT(fit);
    poison(out);
    even(10e6, 10e6, 1e9);
    for (size_t i = 0; i < n; i++)
        loss[i] = 1e-9 * freq[i];
    loss[5] = NAN;
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, &fit, NULL, &out, &err), LSTUB_E_ARGUMENT, err, "item 5|loss = nan dB");
    loss[5] = 0.06;
    fit.f_low = 0.98e9;
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, &fit, NULL, &out, &err), LSTUB_E_ARGUMENT, err, "n: 3 frequencies|f_low = 9.8e+08 Hz|>= 4");
    fit.f_low = 0.0;
    fit.constant = 2;
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, &fit, NULL, &out, &err), LSTUB_E_ARGUMENT, err, "constant = 2");
    fit.constant = 0;
    fit.weighted = -1;
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, &fit, NULL, &out, &err), LSTUB_E_ARGUMENT, err, "weighted = -1");
    fit.weighted = 0;
    fit.symbol_rate = -1.0;
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, &fit, NULL, &out, &err), LSTUB_E_ARGUMENT, err, "symbol_rate = -1 Bd");
    fit.symbol_rate = 0.0;
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, NULL, NULL, &out, &err), LSTUB_E_NULL, err, "fit");
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, &fit, NULL, NULL, &err), LSTUB_E_NULL, err, "out");
    assert_refused(lstub_insertion_loss_deviation(NULL, loss, n, &fit, NULL, &out, &err), LSTUB_E_NULL, err, "freq");
    assert_refused(lstub_insertion_loss_deviation(freq, NULL, n, &fit, NULL, &out, &err), LSTUB_E_NULL, err, "loss");
    for (size_t i = 0; i < n; i++)
        freq[i] = 1e9 + (double)i * 1e-3;
    assert_refused(lstub_insertion_loss_deviation(freq, loss, n, &fit, NULL, &out, &err), LSTUB_E_GEOMETRY, err, "too narrow");
    assert_untouched(out);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("network_time");
    TCase *steps = tcase_create("steps"), *early = tcase_create("causality"), *ripple = tcase_create("loss");
    read_table();
    tcase_add_loop_test(steps, steps_exact, 0, (int)COUNT(known));
    tcase_add_loop_test(steps, steps_of_other_grids, 0, (int)COUNT(known));
    tcase_add_test(steps, noise_at_the_lowest_frequencies);
    tcase_add_test(steps, impedances);
    tcase_add_test(steps, area_of_a_capacitor);
    tcase_add_test(steps, entries);
    tcase_add_test(steps, step_input);
    tcase_add_test(early, causality);
    tcase_add_test(ripple, loss_of_its_own_form);
    tcase_add_test(ripple, loss_table);
    tcase_add_test(ripple, loss_of_a_channel);
    tcase_add_test(ripple, loss_input);
    tcase_set_timeout(steps, 120);
    tcase_set_timeout(early, 120);
    suite_add_tcase(suite, steps);
    suite_add_tcase(suite, early);
    suite_add_tcase(suite, ripple);
    return test_main(suite);
}
