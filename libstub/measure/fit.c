/* What first notches say: the Dk or the length of a stub, and the in-plane Dk of a laminate from several coupons. */
#include "base/base.h"
#include "num/student.h"

#include <math.h>

/* ---- one stub ----------------------------------------------------------------------------------- */

/* A standard error: first order needs it to be less than the value. */
static int32_t check_sigma(double sigma, double value, const char *field, const char *unit, lstub_error *err)
{
    lstub__range range = {0.0, value, 0, unit};
    return lstub__check(sigma, &range, field, err);
}

int32_t lstub_fit_effective_dk(double f, double f_sigma, double length, double length_sigma, int32_t n, double *dk,
                               double *dk_sigma, lstub_error *err)
{
    double value;
    if (lstub__need(dk, "dk", err) < 0 || lstub__need(dk_sigma, "dk_sigma", err) < 0)
        return LSTUB_E_NULL;
    int32_t status = lstub_quarter_wave_dk(f, length, n, &value, err), wrong;
    if (status < 0)
        return status;
    if ((wrong = check_sigma(f_sigma, f, "f_sigma", "Hz", err)) < 0 || (wrong = check_sigma(length_sigma, length, "length_sigma", "m", err)) < 0)
        return wrong;
    *dk = value;
    *dk_sigma = 2.0 * value * hypot(f_sigma / f, length_sigma / length);
    return status;
}

int32_t lstub_fit_length(double f, double f_sigma, double dk, double dk_sigma, int32_t n, double *length, double *length_sigma,
                         lstub_error *err)
{
    double value;
    if (lstub__need(length, "length", err) < 0 || lstub__need(length_sigma, "length_sigma", err) < 0)
        return LSTUB_E_NULL;
    int32_t status = lstub_quarter_wave_length(f, dk, n, &value, err), wrong;
    if (status < 0)
        return status;
    if ((wrong = check_sigma(f_sigma, f, "f_sigma", "Hz", err)) < 0 || (wrong = check_sigma(dk_sigma, dk, "dk_sigma", "", err)) < 0)
        return wrong;
    *length = value;
    *length_sigma = value * hypot(f_sigma / f, 0.5 * dk_sigma / dk);
    return status;
}

/* ---- many coupons ------------------------------------------------------------------------------- */

#define RATIO_LOW   0.5
#define RATIO_HIGH  2.0
#define OFFSET_MOST 1e-2
#define COUPONS_MOST 1000000

static const double step_of[2] = {1e-3, 1e-6};         /* of the differences; at these the model is straight to 1e-6 */
static const double settled[2] = {1e-9, 1e-12};

typedef struct problem {
    lstub_predict *predict;
    void *user;
    const double *f, *f_sigma;
    size_t  count;
    int     parameters;
    int32_t worst;               /* status of the last look: LSTUB_OK or LSTUB_W_RANGE */
} problem;

/* Curvature and slope of chi2 at a point: JtJ a = Jtr. */
typedef struct normal {
    double chi2, jj[3], jr[2];   /* jj: 00, 01, 11 */
} normal;

static double clip(double x, int which)
{
    return which == 0 ? fmin(fmax(x, RATIO_LOW), RATIO_HIGH) : fmin(fmax(x, -OFFSET_MOST), OFFSET_MOST);
}

static int32_t ask(problem *p, const double *at, size_t coupon, double *f, lstub_error *err)
{
    int32_t status = p->predict(p->user, at[0], at[1], coupon, f);
    if (status < 0)
        return lstub__fail(err, status, "predict", (int64_t)coupon, "coupon %lu: predict gives status %ld at ratio = %.6g, offset = %.6g m",
                           (unsigned long)coupon, (long)status, at[0], at[1]);
    if (status > 0)
        p->worst = status;
    return LSTUB_OK;
}

/* chi2 at a point, +inf where a coupon has no notch there; residuals may be null. */
static int32_t chi2_at(problem *p, const double *at, double *chi2, double *residuals, lstub_error *err)
{
    *chi2 = 0.0;
    p->worst = LSTUB_OK;
    for (size_t i = 0; i < p->count; i++) {
        double f = NAN;
        int32_t status = ask(p, at, i, &f, err);
        if (status < 0)
            return status;
        double r = (p->f[i] - f) / p->f_sigma[i];
        *chi2 += isfinite(r) ? r * r : HUGE_VAL;
        if (residuals != NULL)
            residuals[i] = p->f[i] - f;
    }
    return LSTUB_OK;
}

static int32_t normal_at(problem *p, const double *at, normal *out, lstub_error *err)
{
    normal n = {0.0, {0.0, 0.0, 0.0}, {0.0, 0.0}};
    for (size_t i = 0; i < p->count; i++) {
        double middle = NAN, slope[2] = {0.0, 0.0};
        int32_t status = ask(p, at, i, &middle, err);
        for (int k = 0; status == LSTUB_OK && k < p->parameters; k++) {
            double low[2] = {at[0], at[1]}, high[2] = {at[0], at[1]}, below = NAN, above = NAN;
            low[k] = clip(at[k] - step_of[k], k);
            high[k] = clip(at[k] + step_of[k], k);
            if ((status = ask(p, low, i, &below, err)) == LSTUB_OK && (status = ask(p, high, i, &above, err)) == LSTUB_OK)
                slope[k] = (above - below) / (high[k] - low[k]) / p->f_sigma[i];
        }
        if (status < 0)
            return status;
        double r = (p->f[i] - middle) / p->f_sigma[i];
        if (!isfinite(r) || !isfinite(slope[0]) || !isfinite(slope[1]))
            return lstub__fail(err, LSTUB_E_NONE, "predict", (int64_t)i, "coupon %lu: no notch predicted at ratio = %.6g, offset = %.6g m",
                               (unsigned long)i, at[0], at[1]);
        n.chi2 += r * r;
        n.jj[0] += slope[0] * slope[0];
        n.jj[1] += slope[0] * slope[1];
        n.jj[2] += slope[1] * slope[1];
        n.jr[0] += slope[0] * r;
        n.jr[1] += slope[1] * r;
    }
    *out = n;
    return LSTUB_OK;
}

/* Whether the slopes tell the parameters apart at all. */
static int32_t check_apart(const problem *p, const normal *n, lstub_error *err)
{
    if (!(n->jj[0] > 0.0))
        return lstub__fail(err, LSTUB_E_GEOMETRY, "f", -1, "the first notches do not depend on the in-plane ratio");
    if (p->parameters == 2 && !(n->jj[0] * n->jj[2] - n->jj[1] * n->jj[1] > 1e-8 * n->jj[0] * n->jj[2]))
        return lstub__fail(err, LSTUB_E_GEOMETRY, "with_offset", -1,
                           "with_offset: these %lu coupons do not tell ratio and offset apart: their lengths must differ", (unsigned long)p->count);
    return LSTUB_OK;
}

/* The step that Levenberg and Marquardt take, damped by `lambda`. */
static void step(const problem *p, const normal *n, double lambda, double *by)
{
    double a = n->jj[0] * (1.0 + lambda), c = n->jj[2] * (1.0 + lambda), b = n->jj[1];
    by[0] = n->jr[0] / a;
    by[1] = 0.0;
    if (p->parameters == 2) {
        by[0] = (c * n->jr[0] - b * n->jr[1]) / (a * c - b * b);
        by[1] = (a * n->jr[1] - b * n->jr[0]) / (a * c - b * b);
    }
}

/* Whether the undamped step is short, or leads out of the limits: else a coupon without a notch stood in the way. */
static int32_t check_settled(const problem *p, const double *at, const normal *n, lstub_error *err)
{
    double by[2];
    step(p, n, 0.0, by);
    for (int k = 0; k < p->parameters; k++)
        if (fabs(clip(at[k] + by[k], k) - at[k]) > 1e-2 * step_of[k] + 1e-6 * sqrt(n->chi2 / n->jj[2 * k]))
            return lstub__fail(err, LSTUB_E_NONE, "f", -1, "the fit did not settle: ratio = %.6g, offset = %.6g m", at[0], at[1]);
    return LSTUB_OK;
}

static int32_t minimise(problem *p, double *at, normal *n, lstub_error *err)
{
    double lambda = 1e-3;
    int32_t status = normal_at(p, at, n, err);
    for (int turn = 0; status == LSTUB_OK && turn < 200; turn++) {
        double by[2], to[2], chi2;
        if ((status = check_apart(p, n, err)) < 0)
            return status;
        step(p, n, lambda, by);
        for (int k = 0; k < 2; k++)
            to[k] = clip(at[k] + by[k], k);
        if (fabs(to[0] - at[0]) < settled[0] && fabs(to[1] - at[1]) < settled[1])
            return check_settled(p, at, n, err);
        if ((status = chi2_at(p, to, &chi2, NULL, err)) < 0)
            return status;
        if (chi2 < n->chi2) {
            at[0] = to[0];
            at[1] = to[1];
            lambda *= 0.1;
            status = normal_at(p, at, n, err);
        } else if ((lambda = fmax(lambda, 1e-6) * 10.0) > 1e12) {
            return check_settled(p, at, n, err);       /* no way down that rounding does not hide */
        }
    }
    return status < 0 ? status : lstub__fail(err, LSTUB_E_NONE, "f", -1, "the fit did not settle: ratio = %.6g, offset = %.6g m", at[0], at[1]);
}

static int32_t check_inside(const problem *p, const double *at, lstub_error *err)
{
    if (at[0] <= RATIO_LOW || at[0] >= RATIO_HIGH)
        return lstub__fail(err, LSTUB_E_NONE, "ratio", -1, "ratio = %.6g: the best lies at or beyond the end of %g to %g", at[0], RATIO_LOW, RATIO_HIGH);
    if (p->parameters == 2 && fabs(at[1]) >= OFFSET_MOST)
        return lstub__fail(err, LSTUB_E_NONE, "offset", -1, "offset = %.6g m: the best lies at or beyond %g m", at[1], OFFSET_MOST);
    return LSTUB_OK;
}

static void describe(const problem *p, const double *at, const normal *n, lstub_fit *out)
{
    double a = n->jj[0], b = n->jj[1], c = n->jj[2], wider = 1.0;
    LSTUB_INIT(*out);
    out->dof = (int32_t)p->count - p->parameters;
    out->chi2 = n->chi2;
    out->describes = out->dof == 0 || lstub__chi2_above(n->chi2, out->dof) >= 0.01;
    if (out->dof > 0)
        wider = sqrt(fmax(1.0, n->chi2 / out->dof));
    double t = lstub__student_within(0.95, out->dof);
    out->ratio = at[0];
    out->ratio_sigma = wider * sqrt(p->parameters == 2 ? c / (a * c - b * b) : 1.0 / a);
    out->ratio_low = at[0] - t * out->ratio_sigma;
    out->ratio_high = at[0] + t * out->ratio_sigma;
    if (p->parameters == 2) {
        out->offset = at[1];
        out->offset_sigma = wider * sqrt(a / (a * c - b * b));
        out->offset_low = at[1] - t * out->offset_sigma;
        out->offset_high = at[1] + t * out->offset_sigma;
    }
}

static int32_t check_measured(const problem *p, lstub_error *err)
{
    static const lstub__range F = {0.0, 1e12, 1, "Hz"};
    if (p->count < (size_t)p->parameters || p->count > COUPONS_MOST)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "count", -1, "count = %lu coupons: must be >= %d and <= %d", (unsigned long)p->count,
                           p->parameters, COUPONS_MOST);
    for (size_t i = 0; i < p->count; i++) {
        int32_t status = lstub__check(p->f[i], &F, "f", err);
        if (status == LSTUB_OK) {
            lstub__range sigma = {0.0, p->f[i], 1, "Hz"};
            status = lstub__check(p->f_sigma[i], &sigma, "f_sigma", err);
        }
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "coupon %lu", (unsigned long)i);
            return status;
        }
    }
    return LSTUB_OK;
}

int32_t lstub_fit_in_plane_dk(lstub_predict *predict, void *user, const double *f, const double *f_sigma, size_t count,
                              int32_t with_offset, lstub_fit *out, double *residuals, lstub_error *err)
{
    problem p = {predict, user, f, f_sigma, count, with_offset != 0 ? 2 : 1, LSTUB_OK};
    double at[2] = {1.0, 0.0}, chi2;
    normal n;
    lstub_fit ours;
    int32_t status;
    if (predict == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "predict", -1, "predict = null: must not be null");
    if (lstub__need(f, "f", err) < 0 || lstub__need(f_sigma, "f_sigma", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__fits(out, sizeof ours, "out", err)) < 0 || (status = check_measured(&p, err)) < 0
        || (status = minimise(&p, at, &n, err)) < 0 || (status = check_inside(&p, at, err)) < 0
        || (status = chi2_at(&p, at, &chi2, NULL, err)) < 0)
        return status;
    describe(&p, at, &n, &ours);
    if (residuals != NULL && (status = chi2_at(&p, at, &chi2, residuals, err)) < 0)
        return status;
    lstub__give(&ours, sizeof ours, out, sizeof ours, "out", NULL);
    if (p.worst > 0)
        return lstub__fail(err, p.worst, "predict", -1, "first notches beyond the stated range of the model");
    return LSTUB_OK;
}
