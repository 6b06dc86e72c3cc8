/* Power averages over a window in Hz, whatever the steps. */
#include "measure/curve.h"

#include <math.h>
#include <stdlib.h>

#define POWER_LEAST 1e-30        /* -300 dB */

/* Integral of the power up to x, between samples k and k + 1. */
static double integral(const lstub__curve *c, size_t k, double x)
{
    double step = c->f[k + 1] - c->f[k], part = (x - c->f[k]) / step;
    return c->sum[k] + step * part * (c->power[k] + 0.5 * part * (c->power[k + 1] - c->power[k]));
}

void lstub__curve_average(lstub__curve *c)
{
    size_t low = 0, high = 0, last = c->n - 1;
    c->sum[0] = 0.0;
    for (size_t i = 1; i < c->n; i++)
        c->sum[i] = c->sum[i - 1] + 0.5 * (c->power[i] + c->power[i - 1]) * (c->f[i] - c->f[i - 1]);
    for (size_t i = 0; i < c->n; i++) {
        double half = fmin(0.5 * c->window, fmin(c->f[i] - c->f[0], c->f[last] - c->f[i])), mean = c->power[i];
        double from = c->f[i] - half, to = c->f[i] + half;
        if (half > 0.0) {
            while (low + 1 < last && c->f[low + 1] <= from)
                low++;
            while (low > 0 && c->f[low] > from)            /* near the upper end the window shrinks faster than it moves */
                low--;
            while (high + 1 < last && c->f[high + 1] <= to)
                high++;
            mean = (integral(c, high, to) - integral(c, low, from)) / (to - from);
        }
        c->db[i] = 10.0 * log10(fmax(mean, POWER_LEAST));
    }
}

static size_t sample_below(const lstub__curve *c, double f)
{
    size_t low = 0, high = c->n - 1;
    while (high - low > 1) {
        size_t middle = low + (high - low) / 2;
        if (c->f[middle] <= f)
            low = middle;
        else
            high = middle;
    }
    return low;
}

double lstub__curve_mean(const lstub__curve *c, double from, double to)
{
    double sum = integral(c, sample_below(c, to), to) - integral(c, sample_below(c, from), from);
    return 10.0 * log10(fmax(sum / (to - from), POWER_LEAST));
}

double lstub__curve_least_window(const lstub__curve *c) { return 3.0 * (c->f[c->n - 1] - c->f[0]) / (double)(c->n - 1); }

static int rising(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

double lstub__curve_window(const lstub__curve *c)
{
    double band = c->f[c->n - 1] - c->f[0], before = NAN, least = lstub__curve_least_window(c), apart = least;
    size_t count = 0;
    for (size_t i = 1; i + 1 < c->n; i++)
        if (c->power[i] < c->power[i - 1] && c->power[i] <= c->power[i + 1]) {
            if (!isnan(before))
                c->scratch[count++] = c->f[i] - before;
            before = c->f[i];
        }
    if (count > 0) {
        qsort(c->scratch, count, sizeof *c->scratch, rising);
        apart = c->scratch[count / 2];
    }
    return fmax(least, fmin(apart, band / 20.0));
}
