/*
** With R = z_ref/2 the stub has the reflection G = (Z - R)/(Z + R) and S21 = (1 + G)/2: a notch is where G comes nearest to
** -1. G of a passive one-port turns clockwise, fast only at a resonance, whose flank is seen from afar. An interval is
** halved while G at its middle is not what the ends suggest; what is left is smooth at the scale of the samples, so that
** minima of |S21| and upward zeros of the reactance are bracketed by neighbours.
*/
#include "model/notch_search.h"

#include "num/root.h"

#define FINEST   1e-7       /* shortest interval, relative                                              */
#define DEPTH    40

typedef struct sample { double f, s2; cplx z, g; } sample;       /* s2 = |S21|^2 */

typedef struct search {
    lstub__zin_at *zin;
    const void *model;
    double r, bend, found;  /* found: HUGE_VAL until then */
    int    failed;
    sample last[2];         /* the two samples before, in rising frequency */
    int    known;
} search;

static sample look(search *s, double f)
{
    sample p;

    p.f = f;
    p.z = s->zin(s->model, f);
    p.g = cplx_div(cplx_of(p.z.re - s->r, p.z.im), cplx_of(p.z.re + s->r, p.z.im));
    p.s2 = 0.25 * cplx_norm(cplx_of(1.0 + p.g.re, p.g.im));
    if (cplx_norm(p.z) > 1e20) { p.g = cplx_of(1.0, 0.0); p.s2 = 1.0; }
    if (!(p.s2 >= 0.0)) s->failed = 1;
    return p;
}

static double power(double f, const void *context)
{
    search s = *(const search *)context;
    return look(&s, f).s2;
}

/* Zero of the reactance between a (below zero) and b (not below): false position with halving (Illinois). */
static double reactance_zero(search *s, sample a, sample b, double tol)
{
    double fa = a.z.im, fb = b.z.im, x = b.f;
    int k, side = 0;

    for (k = 0; k < 100 && b.f - a.f > tol * b.f; k++) {
        sample m;
        x = a.f - fa * (b.f - a.f) / (fb - fa);
        if (!(x > a.f && x < b.f) || k % 8 == 7) x = 0.5 * (a.f + b.f);
        m = look(s, x);
        if (m.z.im == 0.0) return x;
        if (m.z.im < 0.0) { a = m; fa = m.z.im; if (side < 0) fb *= 0.5; side = -1; }
        else { b = m; fb = m.z.im; if (side > 0) fa *= 0.5; side = 1; }
    }
    return x;
}

/* Deep notches lie at the zero of the reactance, to rounding where nothing is lost, close by in a laminate. */
static double settle(search *s, sample a, sample m, sample b)
{
    const double coarse = 1e-7, fine = 1e-14;
    sample below = m.z.im >= 0.0 ? a : m, above = m.z.im >= 0.0 ? m : b;

    if (below.z.im < 0.0 && above.z.im >= 0.0) {
        double zero = reactance_zero(s, below, above, coarse);
        sample z = look(s, zero);
        if (z.s2 < 1e-9) return reactance_zero(s, below, above, fine);
        for (double reach = 1e-3; z.s2 < 1e-2 && reach < 0.1; reach *= 5.0) {
            double low = zero * (1.0 - reach), high = zero * (1.0 + 0.5 * reach), dip;
            if (low < a.f || high > b.f) break;
            dip = lstub__dip(power, s, low, high);
            if (dip - low > 0.1 * reach * zero && high - dip > 0.1 * reach * zero) return dip;
        }
    }
    return lstub__dip(power, s, a.f, b.f);
}

static void visit(search *s, sample p)
{
    if (s->known == 2 && s->found == HUGE_VAL && s->last[1].s2 < s->last[0].s2 && s->last[1].s2 <= p.s2)
        s->found = settle(s, s->last[0], s->last[1], p);
    if (s->known == 2 && p.s2 == s->last[1].s2) return;
    if (s->known == 2) { s->last[0] = s->last[1]; s->last[1] = p; }
    else s->last[s->known++] = p;
}

static void divide(search *s, sample a, sample b, int depth)
{
    sample m;
    cplx off;

    if (s->failed || s->found < HUGE_VAL) return;
    m = look(s, 0.5 * (a.f + b.f));
    off = cplx_of(m.g.re - 0.5 * (a.g.re + b.g.re), m.g.im - 0.5 * (a.g.im + b.g.im));
    if (depth < DEPTH && b.f - a.f > FINEST * b.f && cplx_norm(off) > s->bend * s->bend
        && (cplx_norm(off) > 0.01 || b.f - a.f > 1e-3 * b.f)) {
        divide(s, a, m, depth + 1);
        divide(s, m, b, depth + 1);
        return;
    }
    visit(s, m);
    visit(s, b);
}

double lstub__notch_search(lstub__zin_at *zin, const void *model, double z_ref, double f_low, double f_high, double step,
                           double bend)
{
    search s;
    sample a, b;
    double f = f_low;

    s.zin = zin;
    s.model = model;
    s.r = 0.5 * z_ref;
    s.found = HUGE_VAL;
    s.bend = bend;
    s.failed = s.known = 0;
    a = look(&s, f_low);
    visit(&s, a);
    while (f < f_high && !s.failed && s.found == HUGE_VAL) {
        f = f + step < f_high ? f + step : f_high;
        b = look(&s, f);
        divide(&s, a, b, 0);
        a = b;
    }
    return s.failed ? NAN : s.found <= f_high ? s.found : HUGE_VAL;
}
