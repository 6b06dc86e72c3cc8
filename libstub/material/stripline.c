/* Stripline: the shape alone. See strip.h for the method. */
#include "material/strip.h"
#include "base/base.h"
#include "num/root.h"

#include <math.h>

typedef struct half {           /* the mapped half of the cross-section */
    double p0, ratio, want;     /* ratio: T; want: w/(2 b) */
} half;

typedef struct edge {
    double x, by_p, by_ratio, by_p0;    /* x/b and its derivatives */
} edge;

/* One image of the source at distance d: ln(1 + e^-a), a = pi |d|/T, with sign. */
static void image(edge *e, double d, double ratio, double sign, double sign_p0)
{
    double a = LSTUB_PI * fabs(d) / ratio, fall = exp(-a), part = fall / (1.0 + fall), slope = d < 0.0 ? part : -part;
    e->x -= sign / LSTUB_PI * log1p(fall);
    e->by_p -= sign / ratio * slope;
    e->by_p0 -= sign_p0 / ratio * slope;
    e->by_ratio -= sign / LSTUB_PI * a / ratio * part;
}

/* x along the strip: the linear part between the walls, and the images, which are 1e-16 of it beyond 6 T. */
static edge along(const half *h, double p)
{
    double lower = fmin(p, h->p0), upper = fmax(p, h->p0), tent = lower * (1.0 - upper) / h->ratio;
    double near_wall = (1.0 - upper) / h->ratio, far_wall = -lower / h->ratio;
    edge e = {tent, p < h->p0 ? near_wall : far_wall, -tent / h->ratio, p < h->p0 ? far_wall : near_wall};
    int last = 2 + (int)ceil(6.0 * h->ratio);
    for (int m = -last; m <= last; m++) {
        image(&e, p - h->p0 - 2 * m, h->ratio, 1.0, -1.0);
        image(&e, p + h->p0 - 2 * m, h->ratio, -1.0, -1.0);
    }
    return e;
}

static double slope_along(double p, const void *context) { return along(context, p).by_p; }

/* The strip's edge, where x turns: between the middle and p0. */
static double edge_of(const half *h, double tol)
{
    double a = fmin(0.5, h->p0), b = fmax(0.5, h->p0), p = lstub__root(slope_along, h, a, b, tol);
    return isnan(p) ? 0.5 * (a + b) : p;       /* centred: the bracket is empty to rounding */
}

/* x hardly changes around its turning point, so that one may be coarse here. */
static double width_error(double ratio, const void *context)
{
    half h = *(const half *)context;
    h.ratio = ratio;
    return log(along(&h, edge_of(&h, 1e-8)).x / h.want);
}

/* T for a thin strip. Bounds: x <= p0 (1 - p0)/T, x >= that less ln(2)/pi, and x < 2 exp(-pi T) beyond T = 0.3. */
static void solve(half *h)
{
    double top = h->p0 * (1.0 - h->p0), low = top / (h->want + 0.5), high = top / h->want;
    high = fmin(high, fmax(0.3, log(2.0 / h->want) / LSTUB_PI));
    h->ratio = lstub__root(width_error, h, low, 1.001 * high, 1e-14 * high);
}

/* How much wider a thin strip is that acts like a thick one, centred between planes b apart. */
static double wider(double w, double t, double b)
{
    double x = t / b, n = 2.0 / (1.0 + (2.0 / 3.0) * t / (b - t));
    double a = x / (2.0 - x), c = pow(0.0796 * x / (w / b + 1.1 * x), n);
    return t / LSTUB_PI * (1.0 - 0.5 * log(a * a + c));
}

static double thin_width(double w, double t, double h1, double h2)
{
    if (t == 0.0)
        return w;
    return w + (h2 * h2 * wider(w, t, 2.0 * h1 + t) + h1 * h1 * wider(w, t, 2.0 * h2 + t)) / (h1 * h1 + h2 * h2);
}

void lstub__stripline(double w, double t, double h1, double h2, lstub__strip *out)
{
    double b = h1 + h2, wide = thin_width(w, t, h1, h2);
    half h = {h2 / b, 0.0, wide / (2.0 * b)};
    solve(&h);
    double p = edge_of(&h, 1e-14);
    out->inductance = 0.5 * h.ratio;
    out->share = p + 0.28 * (h.p0 - p);
    out->planes = out->metal = 0.0;
    if (t == 0.0)
        return;
    /* w/2b = x(p0, T) at its turning point, where its derivative by p is none: how T follows width and heights. */
    edge e = along(&h, p);
    double by_wide = 1.0 / (2.0 * b * e.by_ratio), by_p0 = -e.by_p0 / e.by_ratio;
    double by_h1 = -wide / b * by_wide - by_p0 * h2 / (b * b), by_h2 = -wide / b * by_wide + by_p0 * h1 / (b * b);
    /* One unit off every surface of the planes, and of the strip: how the width follows. */
    double dw = 1e-5 * w, dt = 1e-3 * t, dh = 1e-5 * fmin(h1, h2);
    double planes = (thin_width(w, t, h1 + dh, h2 + dh) - thin_width(w, t, h1 - dh, h2 - dh)) / (2.0 * dh);
    double strip = planes - (thin_width(w + dw, t, h1, h2) - thin_width(w - dw, t, h1, h2)) / dw
                   - (thin_width(w, t + dt, h1, h2) - thin_width(w, t - dt, h1, h2)) / dt;
    out->planes = 0.5 * (by_h1 + by_h2 + by_wide * planes);
    out->metal = 0.5 * (by_h1 + by_h2 + by_wide * strip);
}
