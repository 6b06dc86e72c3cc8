/* Step responses, impedance against time, and whether anything comes too early. */
#include "network/network.h"
#include "network/spectrum.h"
#include "num/bessel.h"

#include <math.h>

#define RISE_OVER_SIGMA 1.6832424671458286     /* 20 to 80 percent of an integrated Gaussian: 2 sqrt(2) erfinv(0.6) */
#define BETA            10.0                   /* of the Kaiser window */
#define ROUNDING        1e-12                  /* of a step response that should reach 1 */
#define TIMES           64                     /* impulse responses are summed so many times at once */

static int32_t port_of(int32_t port, int32_t p, const char *field, lstub_error *err)
{
    if (port >= 0 && port < p)
        return LSTUB_OK;
    return lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s = %ld: must be >= 0 and < %ld", field, (long)port, (long)p);
}

typedef struct edge {
    double step, sigma;
} edge;

/* Spectrum of the edge's slope. */
static double edge_at(const void *context, size_t k)
{
    const edge *e = context;
    double x = LSTUB_PI * (double)k * e->step * e->sigma;
    return exp(-2.0 * x * x);
}

/* The impulse response is df (X0 + 2 Re sum X e^jwt); its integral from t = -1/(4 df) on is the step response. */
static void respond(const lstub__grid *grid, lstub__spectrum *x, double rise_time, const double *t, size_t m, double *out)
{
    edge e = {grid->step, rise_time / RISE_OVER_SIGMA};
    double start = -0.25 / grid->step, before, dc = lstub__spectrum_at(x, 0).re;
    lstub__spectrum_sum(x, edge_at, &e, 1, &start, 1, &before);
    for (size_t first = 0; first < m; first += TIMES) {
        double at[TIMES], sum[TIMES];          /* out may be t */
        size_t count = m - first < TIMES ? m - first : TIMES;
        for (size_t i = 0; i < count; i++)
            at[i] = t[first + i];
        lstub__spectrum_sum(x, edge_at, &e, 1, at, count, sum);
        for (size_t i = 0; i < count; i++)
            out[first + i] = grid->step * dc * (at[i] - start) + (sum[i] - before) / LSTUB_PI;
    }
}

int32_t lstub_step_response(const double *freq, const double *s, size_t n, int32_t p, int32_t to, int32_t from, double rise_time,
                            const double *t, size_t m, double *out, lstub_error *err)
{
    static const lstub__range RISE = {0.0, 1.0, 1, "s"}, TIME = {-1e3, 1e3, 0, "s"};
    lstub__grid grid;
    lstub__spectrum x;
    int32_t status, result;
    size_t beyond = m;
    if ((status = lstub__net_ports(p, 0, err)) < 0 || (status = port_of(to, p, "to", err)) < 0 || (status = port_of(from, p, "from", err)) < 0
        || (status = lstub__check(rise_time, &RISE, "rise_time", err)) < 0)
        return status;
    if (lstub__need(s, "s", err) < 0 || (m > 0 && (lstub__need(t, "t", err) < 0 || lstub__need(out, "out", err) < 0)))
        return LSTUB_E_NULL;
    if ((result = lstub__grid_make(&grid, freq, n, err)) < 0)
        return result;
    for (size_t i = m; i-- > 0;) {
        if ((status = lstub__check(t[i], &TIME, "t", err)) < 0) {
            lstub__fail_where(err, (int64_t)i, "item %lu", (unsigned long)i);
            return status;
        }
        if (!(fabs(t[i] * grid.step - 0.25) <= 0.5))
            beyond = i;
    }
    if ((status = lstub__spectrum_make(&x, &grid, s, p, to, from, err)) < 0)
        return status;
    if (beyond < m)
        result = lstub__fail(err, LSTUB_W_RANGE, "t", (int64_t)beyond, "t[%lu] = %.9g s: steps of %.6g Hz tell -1/4 to 3/4 of %.6g s", (unsigned long)beyond,
                             t[beyond], grid.step, 1.0 / grid.step);
    if (rise_time * freq[n - 1] < 1.0)
        result = lstub__fail(err, LSTUB_W_RANGE, "rise_time", -1, "rise_time = %.9g s: must be >= %.9g s for a band that ends at %.6g Hz", rise_time,
                             1.0 / freq[n - 1], freq[n - 1]);
    respond(&grid, &x, rise_time, t, m, out);
    return result;
}

int32_t lstub_tdr(const double *freq, const double *s, size_t n, int32_t p, int32_t port, double z_ref, double rise_time, const double *t,
                  size_t m, double *impedance, lstub_error *err)
{
    int32_t result;
    if ((result = lstub__net_references(&z_ref, 1, "z_ref", err)) < 0)
        return result;
    if (m > 0 && lstub__need(impedance, "impedance", err) < 0)
        return LSTUB_E_NULL;
    if ((result = lstub__net_ports(p, 0, err)) < 0 || (result = port_of(port, p, "port", err)) < 0
        || (result = lstub_step_response(freq, s, n, p, port, port, rise_time, t, m, impedance, err)) < 0)
        return result;
    for (size_t i = 0; i < m; i++)
        impedance[i] = impedance[i] < 1.0 - ROUNDING ? z_ref * (1.0 + impedance[i]) / (1.0 - impedance[i]) : HUGE_VAL;
    return result;
}

typedef struct kaiser {
    double count, top;         /* steps to f_max; I0(BETA), scaled */
} kaiser;

/* Kaiser's window, 1 at 0. */
static double kaiser_at(const void *context, size_t k)
{
    const kaiser *w = context;
    double part = (double)k / w->count, z = BETA * sqrt(fmax(1.0 - part * part, 0.0)), i0 = 1.0, unused;
    if (z > 0.0)
        lstub__bessel_ik0(z, &i0, &unused);
    return i0 / w->top * exp(z - BETA);
}

/* Share of the energy before `end`, from half a period back; samples at 4 f_max. */
static double early_share(const lstub__grid *grid, lstub__spectrum *x, double end)
{
    kaiser window = {(double)grid->count, 1.0};
    double dc = lstub__spectrum_at(x, 0).re, all = dc * dc, early = 0.0, dt = 0.25 / (window.count * grid->step), unused;
    lstub__bessel_ik0(BETA, &window.top, &unused);
    for (size_t k = 1; k <= grid->count; k++) {
        double w = kaiser_at(&window, k);
        all += 2.0 * w * w * cplx_norm(lstub__spectrum_at(x, k));
    }
    if (!(all > 0.0))
        return 0.0;
    for (size_t first = 0; first < 4 * grid->count; first += TIMES) {
        double t[TIMES], sum[TIMES];
        size_t m = 0;
        while (m < TIMES && first + m < 4 * grid->count && (t[m] = -0.5 / grid->step + (double)(first + m) * dt) < end)
            m++;
        lstub__spectrum_sum(x, kaiser_at, &window, 0, t, m, sum);
        for (size_t i = 0; i < m; i++)
            early += (dc + 2.0 * sum[i]) * (dc + 2.0 * sum[i]);
        if (m < TIMES)
            break;
    }
    return early / (4.0 * window.count) / all;
}

int32_t lstub_network_causality(const double *freq, const double *s, size_t n, int32_t p, double t0, double *early, double *resolution,
                                lstub_error *err)
{
    static const lstub__range DELAY = {0.0, 1e3, 0, "s"};
    lstub__grid grid;
    lstub__spectrum x;
    int32_t status, result;
    if ((status = lstub__net_ports(p, 0, err)) < 0 || (status = lstub__check(t0, &DELAY, "t0", err)) < 0)
        return status;
    if (lstub__need(s, "s", err) < 0 || lstub__need(early, "early", err) < 0 || lstub__need(resolution, "resolution", err) < 0)
        return LSTUB_E_NULL;
    if ((result = lstub__grid_make(&grid, freq, n, err)) < 0)
        return result;
    double half = sqrt(LSTUB_PI * LSTUB_PI + BETA * BETA) / (2.0 * LSTUB_PI * freq[n - 1]);    /* first zero of the window's transform */
    if (!(t0 < 0.5 / grid.step))
        return lstub__fail(err, LSTUB_E_ARGUMENT, "t0", -1, "t0 = %.9g s: must be < %.9g s, half of what steps of %.6g Hz tell", t0, 0.5 / grid.step,
                           grid.step);
    for (int32_t i = 0; i < p * p; i++)
        if ((status = lstub__spectrum_make(&x, &grid, s, p, i / p, i % p, err)) < 0)
            return status;
    for (int32_t i = 0; i < p * p; i++) {
        lstub__spectrum_make(&x, &grid, s, p, i / p, i % p, NULL);
        early[i] = early_share(&grid, &x, t0 - half);
    }
    *resolution = half;
    return result;
}
