/* Microstrip: the shape alone, and its dispersion. See strip.h for the sources. */
#include "material/strip.h"
#include "base/base.h"

#include <math.h>

double lstub__microstrip_air(double u)
{
    double edge = 6.0 + (2.0 * LSTUB_PI - 6.0) * exp(-pow(30.666 / u, 0.7528));
    return LSTUB_ETA0 / (2.0 * LSTUB_PI) * log(edge / u + sqrt(1.0 + 4.0 / (u * u)));
}

/* How much wider a thin strip is that acts like one of thickness t, in units of the height, in a vacuum. */
static double wider(double u, double t)
{
    double th = tanh(sqrt(6.517 * u));
    return t > 0.0 ? t / LSTUB_PI * log(1.0 + 4.0 * exp(1.0) * th * th / t) : 0.0;
}

static double inductance(double w, double t, double h)
{
    return lstub__microstrip_air(w / h + wider(w / h, t / h)) / LSTUB_ETA0;
}

void lstub__microstrip(double w, double t, double h, lstub__strip *out)
{
    out->inductance = inductance(w, t, h);
    out->share = 1.0;
    out->planes = out->metal = 0.0;
    if (t == 0.0)
        return;
    double dw = 1e-5 * w, dt = 1e-3 * t, dh = 1e-5 * h;
    out->planes = (inductance(w, t, h + dh) - inductance(w, t, h - dh)) / (2.0 * dh);
    out->metal = out->planes - (inductance(w + dw, t, h) - inductance(w - dw, t, h)) / dw
                 - (inductance(w, t + dt, h) - inductance(w, t - dt, h)) / dt;
}

/* Thin strip. */
static double thin_dk(double u, double contrast)
{
    double u2 = u * u, u4 = u2 * u2, narrow = u / 52.0, wide = u / 18.1;
    double a = 1.0 + log((u4 + narrow * narrow) / (u4 + 0.432)) / 49.0 + log1p(wide * wide * wide) / 18.7;
    double b = 0.564 * pow((contrast - 0.9) / (contrast + 3.0), 0.053);
    return 0.5 * (contrast + 1.0) + 0.5 * (contrast - 1.0) * pow(1.0 + 10.0 / u, -a * b);
}

double lstub__microstrip_dk(double u, double t_over_h, double contrast, double *u_effective)
{
    double in_air = wider(u, t_over_h), filled = 0.5 * in_air * (1.0 + 1.0 / cosh(sqrt(contrast - 1.0)));
    double ratio = lstub__microstrip_air(u + in_air) / lstub__microstrip_air(u + filled);
    *u_effective = u + filled;
    return thin_dk(u + filled, contrast) * ratio * ratio;
}

double lstub__microstrip_rise(double u, double contrast, double x)
{
    double fn = 1e-6 * x;      /* GHz mm */
    double p1 = 0.27488 + (0.6315 + 0.525 / pow(1.0 + 0.0157 * fn, 20.0)) * u - 0.065683 * exp(-8.7513 * u);
    double p2 = 0.33622 * (1.0 - exp(-0.03442 * contrast));
    double p3 = 0.0363 * exp(-4.6 * u) * (1.0 - exp(-pow(fn / 38.7, 4.97)));
    double p4 = 1.0 + 2.751 * (1.0 - exp(-pow(contrast / 15.916, 8.0)));
    double p = p1 * p2 * pow((0.1844 + p3 * p4) * fn, 1.5763);
    return p / (1.0 + p);
}

double lstub__microstrip_factor(double u, double contrast, double dk, double dk_at_f, double x)
{
    /* The form has poles: where the static Dk is near 1.02, so that it is faded out with little contrast, where there is next
    ** to no dispersion; and beyond its range, where it is left out. */
    double part = contrast <= 20.0 ? fmin(2.0 * contrast - 3.0, 1.0) : 0.0;
    if (part <= 0.0)
        return 1.0;
    double fn = 1e-6 * x, over = contrast - 1.0, over6 = pow(over, 6.0);
    double r1 = fmin(0.03891 * pow(contrast, 1.4), 20.0), r2 = fmin(0.2671 * pow(u, 7.0), 20.0);
    double r3 = 4.766 * exp(-3.228 * pow(u, 0.641)), r4 = 0.016 + pow(0.0514 * contrast, 4.524);
    double r5 = pow(fn / 28.843, 12.0), r6 = fmin(22.2 * pow(u, 1.92), 20.0);
    double r7 = 1.206 - 0.3144 * exp(-r1) * (1.0 - exp(-r2));
    double r8 = 1.0 + 1.275 * (1.0 - exp(-0.004625 * r3 * pow(contrast, 1.674) * pow(fn / 18.365, 2.745)));
    double r9 = 5.086 * r4 * r5 / (0.3838 + 0.386 * r4) * exp(-r6) / (1.0 + 1.2992 * r5) * over6 / (1.0 + 10.0 * over6);
    double r10 = 0.00044 * pow(contrast, 2.136) + 0.0184, fn6 = pow(fn / 19.47, 6.0), r11 = fn6 / (1.0 + 0.0962 * fn6);
    double r12 = 1.0 / (1.0 + 0.00245 * u * u);
    double r13 = 0.9408 * pow(dk_at_f, r8) - 0.9603, r14 = (0.9408 - r9) * pow(dk, r8) - 0.9603;
    double r15 = 0.707 * r10 * pow(fn / 12.3, 1.097);
    double r16 = 1.0 + 0.0503 * contrast * contrast * r11 * (1.0 - exp(-pow(u / 15.0, 6.0)));
    double r17 = r7 * (1.0 - 1.1241 * r12 / r16 * exp(-0.026 * pow(fn, 1.15656) - r15));
    return pow(r13 / r14, part * r17);
}
