/* A response on an even grid, and its Fourier sums, see spectrum.h. */
#include "network/spectrum.h"
#include "network/network.h"

#include <math.h>

#define EVEN   1e-2     /* of the mean spacing: what evenly spaced frequencies may be off */
#define SAME   1e-9     /* of a step: a point on the grid */
#define BLOCK  64       /* times summed side by side */
#define RESYNC 128      /* steps a phasor is turned before it is computed anew */

int32_t lstub__grid_make(lstub__grid *grid, const double *freq, size_t n, lstub_error *err)
{
    int32_t status;
    if (n < 4)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "n", -1, "n = %lu frequencies: must be >= 4", (unsigned long)n);
    if ((status = lstub__net_frequencies(freq, n, err)) < 0)
        return status;
    double first = freq[0], top = freq[n - 1], mean = (top - first) / (double)(n - 1);
    if (first > 0.5 * top)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "freq", 0, "freq[0] = %.9g Hz: must be <= half of the last, %.9g Hz, to go on to 0 from there",
                           first, top);
    int even = 1;
    for (size_t i = 0; i < n; i++)
        even &= fabs(freq[i] - (first + (double)i * mean)) <= EVEN * mean;
    grid->freq = freq;
    grid->n = n;
    grid->count = even ? (size_t)(top / mean + 0.5) : 4 * n;
    grid->step = top / (double)grid->count;
    if (first > top / 20.0)
        return lstub__fail(err, LSTUB_W_RANGE, "freq", 0, "freq[0] = %.9g Hz: what is below is a guess from there, and a 20th of the band or more",
                           first);
    return LSTUB_OK;
}

static cplx turned(const lstub__spectrum *x, cplx h, double f)
{
    double turns = f * x->delay;
    double angle = 2.0 * LSTUB_PI * (turns - floor(turns));
    return cplx_mul(h, cplx_of(cos(angle), sin(angle)));
}

static cplx given(const lstub__spectrum *x, size_t i) { return cplx_of(x->h[i * x->stride], x->h[i * x->stride + 1]); }

/* Value i without the mean delay. */
static cplx still(const lstub__spectrum *x, size_t i) { return turned(x, given(x, i), x->grid->freq[i]); }

/* Phase from point to point by least squares, a strong point counting more. */
static double mean_delay(const lstub__spectrum *x)
{
    const lstub__grid *g = x->grid;
    double top = 0.0, bottom = 0.0;
    for (size_t i = 1; i < g->n; i++) {
        cplx a = given(x, i - 1), b = given(x, i), turn = cplx_mul(b, cplx_conj(a));
        double df = g->freq[i] - g->freq[i - 1], weight = cplx_abs(turn);
        top -= weight * df * atan2(turn.im, turn.re);
        bottom += weight * df * df;
    }
    return bottom > 0.0 ? top / (2.0 * LSTUB_PI * bottom) : 0.0;
}

int32_t lstub__spectrum_make(lstub__spectrum *x, const lstub__grid *grid, const double *s, int32_t p, int32_t to, int32_t from,
                             lstub_error *err)
{
    const double *f = grid->freq;
    x->grid = grid;
    x->h = s + 2 * (to * p + from);
    x->stride = 2 * (size_t)p * (size_t)p;
    x->at = 0;
    for (size_t i = 0; i < grid->n; i++) {
        cplx h = given(x, i);
        if (!(fabs(h.re) <= 1e30 && fabs(h.im) <= 1e30))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "s", (int64_t)i, "s[%lu, %ld, %ld] = %g%+gj: must be finite and <= 1e30", (unsigned long)i,
                               (long)to, (long)from, h.re, h.im);
    }
    x->delay = mean_delay(x);
    x->re0 = x->re2 = x->im1 = x->im3 = 0.0;
    if (f[0] > 0.0) {
        size_t second = 1;
        while (second < grid->n - 1 && f[second] < 2.0 * f[0])
            second++;
        cplx a = still(x, 0), b = still(x, second);
        double d = f[second] * f[second] - f[0] * f[0];
        x->re2 = (b.re - a.re) / d;
        x->re0 = a.re - x->re2 * f[0] * f[0];
        x->im3 = (b.im / f[second] - a.im / f[0]) / d;
        x->im1 = a.im / f[0] - x->im3 * f[0] * f[0];
    }
    return LSTUB_OK;
}

/* Lagrange's cubic through the points around interval `at`. */
static cplx between(const lstub__spectrum *x, double f)
{
    const double *freq = x->grid->freq;
    size_t low = x->at > 0 ? x->at - 1 : 0;
    if (low + 4 > x->grid->n)
        low = x->grid->n - 4;
    cplx sum = cplx_of(0.0, 0.0);
    for (size_t i = low; i < low + 4; i++) {
        double weight = 1.0;
        for (size_t j = low; j < low + 4; j++)
            if (j != i)
                weight *= (f - freq[j]) / (freq[i] - freq[j]);
        sum = cplx_add(sum, cplx_scale(still(x, i), weight));
    }
    return sum;
}

cplx lstub__spectrum_at(lstub__spectrum *x, size_t k)
{
    const lstub__grid *g = x->grid;
    double f = (double)k * g->step, near = SAME * g->step;
    if (k == 0)
        return cplx_of(g->freq[0] > 0.0 ? x->re0 : x->h[0], 0.0);
    if (f < g->freq[0] - near) {
        cplx h = cplx_of(x->re0 + x->re2 * f * f, f * (x->im1 + x->im3 * f * f));
        return turned(x, h, -f);
    }
    if (f < g->freq[x->at])
        x->at = 0;
    while (x->at + 2 < g->n && f >= g->freq[x->at + 1] - near)
        x->at++;
    for (size_t i = x->at; i < x->at + 2; i++)
        if (fabs(f - g->freq[i]) <= near)
            return given(x, i);
    return turned(x, between(x, f), -f);
}

/* Phasors of one block of times, k steps from 0. */
typedef struct phasors {
    double re[BLOCK], im[BLOCK], turn_re[BLOCK], turn_im[BLOCK], turns[BLOCK], sum[BLOCK];
} phasors;

static void set(double turns, double *re, double *im)
{
    double angle = 2.0 * LSTUB_PI * (turns - floor(turns));
    *re = cos(angle);
    *im = sin(angle);
}

static void sum_block(lstub__spectrum *x, lstub__weight *weight, const void *context, int integrated, phasors *p)
{
    for (size_t k = 1; k <= x->grid->count; k++) {
        cplx h = cplx_scale(lstub__spectrum_at(x, k), weight(context, k));
        if (integrated)
            h = cplx_of(h.im / (double)k, -h.re / (double)k);
        if (k % RESYNC == 1)
            for (int i = 0; i < BLOCK; i++)
                set((double)k * p->turns[i], &p->re[i], &p->im[i]);
        for (int i = 0; i < BLOCK; i++) {
            double re = p->re[i], im = p->im[i];
            p->sum[i] += h.re * re - h.im * im;
            p->re[i] = re * p->turn_re[i] - im * p->turn_im[i];
            p->im[i] = re * p->turn_im[i] + im * p->turn_re[i];
        }
    }
}

void lstub__spectrum_sum(lstub__spectrum *x, lstub__weight *weight, const void *context, int integrated, const double *t, size_t m,
                         double *sum)
{
    for (size_t first = 0; first < m; first += BLOCK) {
        phasors p;
        size_t count = m - first < BLOCK ? m - first : BLOCK;
        for (size_t i = 0; i < BLOCK; i++) {
            p.turns[i] = i < count ? x->grid->step * t[first + i] : 0.0;
            set(p.turns[i], &p.turn_re[i], &p.turn_im[i]);
            p.sum[i] = 0.0;
        }
        sum_block(x, weight, context, integrated, &p);
        for (size_t i = 0; i < count; i++)
            sum[first + i] = p.sum[i];
    }
}
