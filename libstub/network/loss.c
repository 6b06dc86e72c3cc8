/* The smooth part of an insertion loss, and what deviates from it. */
#include "network/network.h"

#include <math.h>

#define TERMS 4

typedef struct triangle {      /* least squares by rotations, a row at a time: R x = y */
    int    terms;
    double r[TERMS][TERMS], y[TERMS];
} triangle;

static void add_row(triangle *q, double row[TERMS], double value)
{
    for (int k = 0; k < q->terms; k++) {
        double length = hypot(q->r[k][k], row[k]);
        if (length == 0.0)
            continue;
        double c = q->r[k][k] / length, s = row[k] / length, y = q->y[k];
        for (int j = k; j < q->terms; j++) {
            double above = q->r[k][j];
            q->r[k][j] = c * above + s * row[j];
            row[j] = c * row[j] - s * above;
        }
        q->y[k] = c * y + s * value;
        value = c * value - s * y;
    }
}

/* 0, or -1 where the rows do not tell the terms apart. */
static int solve(const triangle *q, double x[TERMS])
{
    for (int k = q->terms; k-- > 0;) {
        double sum = q->y[k];
        if (!(fabs(q->r[k][k]) > 1e-12 * fabs(q->r[0][0])))
            return -1;
        for (int j = k + 1; j < q->terms; j++)
            sum -= q->r[k][j] * x[j];
        x[k] = sum / q->r[k][k];
    }
    return 0;
}

/* sqrt x, x, x^2 and, last, 1; x = f over the highest frequency fitted. */
static void terms_at(double x, double row[TERMS])
{
    row[0] = sqrt(x);
    row[1] = x;
    row[2] = x * x;
    row[3] = 1.0;
}

static double fitted(double x, const double a[TERMS])
{
    return a[0] * sqrt(x) + a[1] * x + a[2] * x * x + a[3];
}

static double merit_weight(double f, const lstub_loss_fit *fit)
{
    double x = LSTUB_PI * f / fit->symbol_rate, sinc = x == 0.0 ? 1.0 : sin(x) / x;
    double t = f * fit->transition_time / 0.2365, r = f / (fit->receiver_bandwidth > 0.0 ? fit->receiver_bandwidth : 0.75 * fit->symbol_rate);
    return sinc * sinc / ((1.0 + pow(t, 4.0)) * (1.0 + pow(r, 8.0)));
}

static int32_t check_fit(lstub_loss_fit *fit, const lstub_loss_fit *theirs, lstub_error *err)
{
    static const lstub__range BAND = {0.0, 1e12, 0, "Hz"}, RATE = {0.0, 1e12, 0, "Bd"}, TIME = {0.0, 1.0, 0, "s"};
    int32_t status = lstub__take(fit, sizeof *fit, theirs, sizeof *fit, "fit", err);
    if (status < 0 || (status = lstub__check(fit->f_low, &BAND, "f_low", err)) < 0 || (status = lstub__check(fit->f_high, &BAND, "f_high", err)) < 0
        || (status = lstub__check(fit->symbol_rate, &RATE, "symbol_rate", err)) < 0
        || (status = lstub__check(fit->transition_time, &TIME, "transition_time", err)) < 0
        || (status = lstub__check(fit->receiver_bandwidth, &BAND, "receiver_bandwidth", err)) < 0)
        return status;
    if (fit->constant < 0 || fit->constant > 1)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "constant", -1, "constant = %ld: must be 0 or 1", (long)fit->constant);
    if (fit->weighted < 0 || fit->weighted > 1)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "weighted", -1, "weighted = %ld: must be 0 or 1", (long)fit->weighted);
    return status;
}

static int32_t check_data(const double *freq, const double *loss, size_t n, lstub_error *err)
{
    static const lstub__range LOSS = {-1e3, 1e4, 0, "dB"};
    int32_t status = lstub__net_frequencies(freq, n, err);
    if (status == LSTUB_OK)
        status = lstub__need(loss, "loss", err);
    for (size_t i = 0; status == LSTUB_OK && i < n; i++)
        if ((status = lstub__check(loss[i], &LOSS, "loss", err)) < 0)
            lstub__fail_where(err, (int64_t)i, "item %lu", (unsigned long)i);
    return status;
}

/* The fit over points first .. last-1, a[] to x = f/top. */
static int32_t fit_terms(const double *freq, const double *loss, size_t first, size_t last, const lstub_loss_fit *fit, double top,
                         double a[TERMS], lstub_error *err)
{
    triangle q = {TERMS - 1 + fit->constant, {{0.0}}, {0.0}};
    a[TERMS - 1] = 0.0;
    for (size_t i = first; i < last; i++) {
        double row[TERMS], weight = fit->weighted ? pow(10.0, -loss[i] / 20.0) : 1.0;
        terms_at(freq[i] / top, row);
        for (int k = 0; k < TERMS; k++)
            row[k] *= weight;
        add_row(&q, row, loss[i] * weight);
    }
    if (solve(&q, a) < 0)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "freq", -1, "freq: %.6g to %.6g Hz is too narrow a band to tell the terms of the fit apart",
                           freq[first], freq[last - 1]);
    return LSTUB_OK;
}

int32_t lstub_insertion_loss_deviation(const double *freq, const double *loss, size_t n, const lstub_loss_fit *fit, double *deviation,
                                       lstub_loss_deviation *out, lstub_error *err)
{
    lstub_loss_fit ours;
    lstub_loss_deviation result;
    double a[TERMS], square = 0.0, merit = 0.0;
    int32_t status;
    if ((status = check_fit(&ours, fit, err)) < 0 || (status = lstub__fits(out, sizeof *out, "out", err)) < 0
        || (status = check_data(freq, loss, n, err)) < 0)
        return status;
    size_t first = 0, last = n;
    while (first < n && freq[first] < ours.f_low)
        first++;
    while (last > first && ours.f_high > 0.0 && freq[last - 1] > ours.f_high)
        last--;
    if (last - first < (size_t)(TERMS + ours.constant))
        return lstub__fail(err, LSTUB_E_ARGUMENT, "n", -1, "n: %lu frequencies from f_low = %.6g Hz to f_high = %.6g Hz: must be >= %d",
                           (unsigned long)(last - first), ours.f_low, ours.f_high, TERMS + ours.constant);
    double top = freq[last - 1];
    if ((status = fit_terms(freq, loss, first, last, &ours, top, a, err)) < 0)
        return status;
    LSTUB_INIT(result);
    for (size_t i = 0; i < n; i++) {
        int within = i >= first && i < last;
        double d = within ? loss[i] - fitted(freq[i] / top, a) : NAN;
        if (within) {
            square += d * d;
            merit += ours.symbol_rate > 0.0 ? merit_weight(freq[i], &ours) * d * d : NAN;
            result.greatest = fmax(result.greatest, fabs(d));
        }
        if (deviation != NULL)
            deviation[i] = d;
    }
    result.points = (int64_t)(last - first);
    result.a0 = a[3];
    result.a1 = a[0] / sqrt(top);
    result.a2 = a[1] / top;
    result.a4 = a[2] / (top * top);
    result.rms = sqrt(square / (double)result.points);
    result.fom = sqrt(merit / (double)result.points);
    return lstub__give(&result, sizeof result, out, sizeof result, "out", err);
}
