/* The loss of the channel over frequency, a0 + a1 sqrt f + a2 f + a4 f^2 in dB, fitted so that notches do not pull it. */
#include "measure/curve.h"
#include "num/dense.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define TERMS 4
#define TURNS 20

static void terms(double x, double *out)       /* x = f over the highest */
{
    out[0] = 1.0;
    out[1] = sqrt(x);
    out[2] = x;
    out[3] = x * x;
}

/* The averages are smooth: of many samples every so many do. */
static size_t skip_of(const lstub__curve *c) { return 1 + c->n / 1024; }

/* Share of a sample in an integral over the band: uneven steps must not weigh. */
static double share(const lstub__curve *c, size_t i)
{
    size_t skip = skip_of(c), low = i >= skip ? i - skip : 0, high = i + skip < c->n ? i + skip : c->n - 1;
    return 0.5 * (c->f[high] - c->f[low]) / (c->f[c->n - 1] - c->f[0]);
}

/* Residuals beyond `scale` dB lose their weight (Geman, McClure); above the curve they keep it where `upper`. */
static double weight(const lstub__curve *c, size_t i, double scale, int upper)
{
    double r = c->db[i] - c->stubs[i] - c->trend[i], s = r / scale;
    double w = upper && r > 0.0 ? 1.0 : 1.0 / ((1.0 + s * s) * (1.0 + s * s));
    return w * share(c, i) / (1.0 + 0.01 * c->stubs[i] * c->stubs[i]);   /* the bottom of a notch says little of the trend */
}

/* The terms of a mask, least squares: how much of the square they take, and their coefficients; 0 where one is a gain. */
static double part(const double *a, const double *b, int mask, double *x)
{
    double m[TERMS * TERMS], y[TERMS], taken = 0.0;
    int at[TERMS], n = 0;
    for (int j = 0; j < TERMS; j++)
        if (mask & 1 << j)
            at[n++] = j;
    for (int j = 0; j < n; j++) {
        for (int k = 0; k < n; k++)
            m[j * n + k] = a[at[j] * TERMS + at[k]] * (j == k ? 1.0 + 1e-9 : 1.0);     /* a narrow band does not tell them apart */
        y[j] = b[at[j]];
    }
    memset(x, 0, TERMS * sizeof *x);
    if (lstub__rsolve(m, n, n, y, 1, 1) < 0)
        return 0.0;
    for (int j = 0; j < n; j++) {
        if (at[j] > 0 && y[j] > 0.0)
            return 0.0;
        x[at[j]] = y[j];
        taken += y[j] * b[at[j]];
    }
    return taken;
}

static double value(const double *x, double at)
{
    double t[TERMS];
    terms(at, t);
    return x[0] + x[1] * t[1] + x[2] * t[2] + x[3] * t[3];
}

/* A channel loses more the higher the frequency, by every term: the best of all choices of terms that do. */
static void solve(lstub__curve *c, double scale, int upper, int first, double *best)
{
    double a[TERMS * TERMS] = {0.0}, b[TERMS] = {0.0}, t[TERMS], x[TERMS], most = 0.0, top = c->f[c->n - 1];
    for (size_t i = 0; i < c->n; i += skip_of(c)) {
        double w = first ? share(c, i) : weight(c, i, scale, upper), y = c->db[i] - c->stubs[i];
        terms(c->f[i] / top, t);
        for (int j = 0; j < TERMS; j++) {
            for (int k = 0; k <= j; k++)
                a[j * TERMS + k] += w * t[j] * t[k];
            b[j] += w * t[j] * y;
        }
    }
    for (int j = 0; j < TERMS; j++)
        for (int k = j + 1; k < TERMS; k++)
            a[j * TERMS + k] = a[k * TERMS + j];
    memset(best, 0, TERMS * sizeof *best);
    for (int mask = 1; mask < 1 << TERMS; mask += 2) {
        double taken = part(a, b, mask, x);
        if (taken > most) {
            most = taken;
            memcpy(best, x, sizeof x);
        }
    }
    for (size_t i = 0; i < c->n; i += skip_of(c))
        c->trend[i] = value(best, c->f[i] / top);
}

static int rising(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

double lstub__curve_spread(const lstub__curve *c)
{
    for (size_t i = 0; i < c->n; i++)
        c->scratch[i] = fabs(c->db[i] - c->stubs[i] - c->trend[i]);
    qsort(c->scratch, c->n, sizeof *c->scratch, rising);
    return 1.4826 * c->scratch[c->n / 2];
}

void lstub__curve_trend(lstub__curve *c, int upper)
{
    double scale = 30.0, x[TERMS];                     /* from one that keeps all to one that keeps what fits */
    solve(c, scale, upper, 1, x);
    for (int turn = 0; turn < TURNS; turn++) {
        solve(c, scale, upper, 0, x);
        scale = fmax(0.8 * scale, 1.5);
    }
    for (size_t i = 0; i < c->n; i++)
        c->trend[i] = value(x, c->f[i] / c->f[c->n - 1]);
    c->spread = lstub__curve_spread(c);
}
