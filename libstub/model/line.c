#include "model/line.h"

#include "num/root.h"

#include <math.h>

#define EULER_GAMMA 0.57721566490153286

/*
** No return near: the radial wave of the plate pair carries the return current. Per metre of barrel, from
** Z = j (eta h/(2 pi a)) H0(ka)/H1(ka) for small ka: jwL' = (w mu0/4) [1 - j (2/pi) (ln(ka/2) + gamma)]. The real part
** is what it radiates. Source: radial transmission line, Marcuvitz.
*/
cplx lstub__line_inductance(const lstub__line *line, double f)
{
    if (line->radial_dk == 0.0)
        return cplx_of(line->inductance, 0.0);
    double ka = 2.0 * LSTUB_PI * f * sqrt(line->radial_dk) / LSTUB_C0 * line->radius;
    return cplx_scale(cplx_of(-log(0.5 * ka) - EULER_GAMMA, -0.5 * LSTUB_PI), LSTUB_MU0 / (2.0 * LSTUB_PI));
}

cplx lstub__line_capacitance(const lstub__line *line, double f)
{
    cplx lambda = lstub__wideband_lambda(f);
    return cplx_of(line->c_constant + line->c_slope * lambda.re, line->c_slope * lambda.im);
}

/* Y = Ys (Yl + Ys T)/(Ys + Yl T) with Yl = jw Ce, T = tanh(gamma L). */
cplx lstub__line_admittance(const lstub__line *line, double f)
{
    double w = 2.0 * LSTUB_PI * f;
    cplx c = lstub__line_capacitance(line, f);
    cplx root = cplx_sqrt(cplx_mul(lstub__line_inductance(line, f), c));   /* gamma = jw root, Ys = c/root */
    cplx ys = cplx_div(c, root);
    cplx t = cplx_tanh(cplx_scale(cplx_of(-root.im, root.re), w * line->length));
    cplx yl = cplx_of(0.0, w * line->c_end);
    cplx down = cplx_add(ys, cplx_mul(yl, t));
    if (cplx_norm(down) == 0.0)              /* on the very notch of a lossless stub */
        return cplx_of(LSTUB__SHORT, 0.0);
    return cplx_mul(ys, cplx_div(cplx_add(yl, cplx_mul(ys, t)), down));
}

/* ---- notches ----------------------------------------------------------------------------------- */

typedef struct seeing {
    const lstub__line *line;
    double z_ref;
} seeing;

static double power_at(double f, const void *context)
{
    const seeing *s = context;
    cplx y = lstub__line_admittance(s->line, f);
    return 1.0 / cplx_norm(cplx_of(2.0 + s->z_ref * y.re, s->z_ref * y.im));
}

/*
** Zero number n = 1, 2 ... of the reactance without loss: where to look for notch n; NaN beyond LSTUB__F_MAX. C' changes
** slowly with f: a fixed point, some digits a turn.
*/
static double seed(const lstub__line *line, int n)
{
    double f = 1e10;
    for (int turn = 0; turn < 60; turn++) {
        double c = lstub__line_capacitance(line, f).re;
        double theta = lstub__open_stub_angle(line->c_end / (c * line->length), n);
        double next = theta / (2.0 * LSTUB_PI * line->length * sqrt(line->inductance * c));
        if (!(next <= LSTUB__F_MAX))     /* NaN, too: a lossy laminate's Dk below 0 */
            return NAN;
        if (fabs(next - f) <= 1e-13 * f)
            return next;
        f = next;
    }
    return f;
}

/* Notch n of a line with a return: at its seed but for losses, which move it a little. NaN where there is none. */
static double guided_notch(const seeing *s, double f, int n)
{
    if (s->line->lossless)
        return f;
    for (double spread = 0.05; spread < 0.9; spread *= 1.7) {
        double low = f * (1.0 - spread / n), high = f * (1.0 + 0.5 * spread / n), edge = 1e-4 * f;
        double found = lstub__dip(power_at, s, low, high);
        if (found - low > edge && high - found > edge)
            return found;
    }
    return NAN;
}

/* A barrel that radiates has shallow notches, broad and far from any zero: the first dip in steps of 4 percent. */
static double radial_notch(const seeing *s, double after, double f_max)
{
    const double ratio = 1.04;
    double low = fmax(after * (1.0 + 1e-6), 1e8), f = low * ratio, p_low = power_at(low, s), p = power_at(f, s);
    while (f <= f_max) {
        double high = f * ratio, p_high = power_at(high, s);
        if (p < p_low && p <= p_high) {
            double found = lstub__dip(power_at, s, low, high);
            return found <= f_max ? found : HUGE_VAL;
        }
        low = f;
        f = high;
        p_low = p;
        p = p_high;
    }
    return HUGE_VAL;
}

double lstub__line_notch(const lstub__line *line, double z_ref, double after, double f_max)
{
    seeing s = {line, z_ref};
    if (line->radial_dk > 0.0)
        return radial_notch(&s, after, f_max);
    for (int n = 1;; n++) {
        double at = seed(line, n);
        if (isnan(at) || at > 2.0 * f_max)
            return HUGE_VAL;
        double f = 2.0 * at < after ? 0.0 : guided_notch(&s, at, n);
        if (f > after)
            return f <= f_max ? f : HUGE_VAL;
    }
}
