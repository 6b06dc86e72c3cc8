#include "num/root.h"

#include <math.h>

int lstub__bracket(lstub__function *f, const void *context, double *a, double *b, double tol)
{
    double fa = f(*a, context), fb = f(*b, context);
    int side = 0, slow = 0;
    if (isnan(fa) || isnan(fb) || (fa < 0.0) == (fb < 0.0))
        return 0;
    while (*b - *a > tol) {
        double width = *b - *a, x = slow ? 0.5 * (*a + *b) : *b - fb * (*b - *a) / (fb - fa);
        if (!(x > *a + 0.25 * tol))
            x = *a + (side == 1 ? 0.5 * width : 0.5 * tol);
        if (!(x < *b - 0.25 * tol))
            x = *b - (side == -1 ? 0.5 * width : 0.5 * tol);
        if (x <= *a || x >= *b)       /* no double between them */
            break;
        double fx = f(x, context);
        if ((fx < 0.0) == (fb < 0.0)) {
            *b = x;
            fb = fx;
            fa *= side == -1 ? 0.5 : 1.0;
            side = -1;
        } else {
            *a = x;
            fa = fx;
            fb *= side == 1 ? 0.5 : 1.0;
            side = 1;
        }
        slow = !slow && *b - *a > 0.5 * width;
    }
    return 1;
}

double lstub__root(lstub__function *f, const void *context, double a, double b, double tol)
{
    if (f(a, context) == 0.0)
        return a;
    if (f(b, context) == 0.0)
        return b;
    return lstub__bracket(f, context, &a, &b, tol) ? 0.5 * (a + b) : NAN;
}

double lstub__minimum(lstub__function *f, const void *context, double a, double b, double tol)
{
    const double part = 0.38196601125010515;   /* 2 - golden ratio */
    double x = a + part * (b - a), w = x, v = x, fx = f(x, context), fw = fx, fv = fx, step = 0.0, before = 0.0;
    for (int turn = 0; turn < 200 && fmax(x - a, b - x) > 2.0 * tol; turn++) {
        double r = (x - w) * (fx - fv), q = (x - v) * (fx - fw), p = (x - v) * q - (x - w) * r, last = before;
        q = 2.0 * (q - r);
        p = q > 0.0 ? -p : p;
        q = fabs(q);
        before = step;
        if (turn > 0 && fabs(p) < fabs(0.5 * q * last) && p > q * (a - x) && p < q * (b - x)) {
            step = p / q;
        } else {
            before = x < 0.5 * (a + b) ? b - x : a - x;
            step = part * before;
        }
        double u = x + (fabs(step) >= tol ? step : copysign(tol, step));
        u = fmin(fmax(u, a + 0.5 * tol), b - 0.5 * tol);
        double fu = f(u, context);
        if (fu <= fx) {
            if (u >= x)
                a = x;
            else
                b = x;
            v = w; fv = fw;
            w = x; fw = fx;
            x = u; fx = fu;
        } else {
            if (u < x)
                a = u;
            else
                b = u;
            if (fu <= fw || w == x) {
                v = w; fv = fw;
                w = u; fw = fu;
            } else if (fu <= fv || v == x || v == w) {
                v = u; fv = fu;
            }
        }
    }
    return x;
}

typedef struct difference {
    lstub__function *f;
    const void *context;
    double h;
} difference;

static double central(double x, const void *context)
{
    const difference *d = context;
    return d->f(x + d->h, d->context) - d->f(x - d->h, d->context);
}

/* A Newton step on the central difference towards the minimum near x; NaN where the curve is not hollow there. */
static double step_to_dip(lstub__function *f, const void *context, double x, double h)
{
    double low = f(x - h, context), here = f(x, context), high = f(x + h, context), bend = (high - here) + (low - here);
    return bend > 0.0 ? -0.5 * h * (high - low) / bend : NAN;
}

double lstub__dip(lstub__function *f, const void *context, double a, double b)
{
    double x = lstub__minimum(f, context, a, b, 5e-4 * b), h = 1e-4 * x;
    for (int turn = 0; turn < 6 && x - h > a && x + h < b; turn++) {
        double step = step_to_dip(f, context, x, h);
        if (!(fabs(step) < 2e-3 * x) || x + step <= a || x + step >= b)
            break;
        x += step;
        if (turn > 0 && fabs(step) < 1e-8 * x)     /* the next would be shorter by far more than that */
            return x;
        h = 1e-6 * x;
    }
    x = lstub__minimum(f, context, a, b, 2e-5 * b);
    double reach = 1e-4 * x;
    difference d = {f, context, 1e-6 * x};
    double sharp = lstub__root(central, &d, fmax(a, x - reach), fmin(b, x + reach), 1e-13 * x);
    return isnan(sharp) ? x : sharp;
}

/* t + atan(q t) = (n - 1/2) pi: rising and concave, so Newton from 0 comes from the left and never leaves. */
double lstub__open_stub_angle(double q, int n)
{
    const double pi = 3.14159265358979323846;
    double high = (n - 0.5) * pi, t = high / (1.0 + q);
    if (q == 0.0)
        return high;
    for (int turn = 0; turn < 100; turn++) {
        double next = t - (t + atan(q * t) - high) / (1.0 + q / (1.0 + q * t * (q * t)));
        if (fabs(next - t) <= 4e-16 * t)
            return next;
        t = next;
    }
    return t;
}
