/*
** The shape of a notch. Past a stub of impedance Zin on a matched line S21 = 2 z/(1 + 2 z), z = Zin/Z0; with 2 z = r - j x
** and D = |S21|^2 the quantity q = D/(1 - D) = (r^2 + x^2)/(1 + 2 r) has no saturation, and next to its notch an open line
** has x = zeta cot(pi f'/(2 f)) = -zeta v, v = tan(pi (f' - f)/(2 f)): q is a parabola in v, far up its flanks. A slope
** that the trend missed, or a slow ripple, multiplies it by 1 + s v: a cubic takes that up. Linear least squares.
*/
#include "measure/curve.h"
#include "num/dense.h"

#include <math.h>
#include <string.h>

#define TERMS  4
#define TURNS  12
#define BLOCKS 64

typedef struct range {
    size_t from, to;             /* samples, both included */
} range;

static double depth_at(const lstub__curve *c, size_t i) { return c->db[i] - c->trend[i]; }

static double q_of(const lstub__curve *c, size_t i)
{
    double d = pow(10.0, 0.1 * depth_at(c, i));
    return d / (1.0 - d);
}

/* The flanks up to half the depth in dB: contiguous, and where q means something. */
static range flanks(const lstub__curve *c, const lstub__dip *dip)
{
    range r = {dip->at, dip->at};
    double limit = -0.5 * dip->depth;
    while (r.from > 0 && depth_at(c, r.from - 1) <= limit)
        r.from--;
    while (r.to + 1 < c->n && depth_at(c, r.to + 1) <= limit)
        r.to++;
    return r;
}

static double v_of(double f, double centre) { return tan(0.5 * LSTUB_PI * (f - centre) / centre); }
static double f_of(double v, double centre) { return centre * (1.0 + 2.0 / LSTUB_PI * atan(v)); }

static double share(const lstub__curve *c, size_t i)
{
    size_t low = i > 0 ? i - 1 : 0, high = i + 1 < c->n ? i + 1 : i;
    return c->f[high] - c->f[low];
}

typedef struct cubic {
    double a[TERMS];             /* q = a0 + a1 v + a2 v^2 + a3 v^3 */
    double inverse[TERMS * TERMS];
    double lift;                 /* keeps the bottom from having all the weight */
    double centre;
} cubic;

static void powers(double v, double *t)
{
    t[0] = 1.0;
    t[1] = v;
    t[2] = v * v;
    t[3] = v * v * v;
}

static double value(const cubic *p, double v) { return p->a[0] + v * (p->a[1] + v * (p->a[2] + v * p->a[3])); }

/* Errors are relative in |S|^2: of q they are q (1 + q). */
static double sigma_of(const cubic *p, double q) { return (fmax(q, 0.0) + p->lift) * (1.0 + fmax(q, 0.0)); }

static int solve(const lstub__curve *c, range r, cubic *p, int first)
{
    double m[TERMS * TERMS] = {0.0}, copy[TERMS * TERMS], b[TERMS] = {0.0}, t[TERMS];
    for (size_t i = r.from; i <= r.to; i++) {
        double v = v_of(c->f[i], p->centre), q = q_of(c, i), s = sigma_of(p, first ? q : value(p, v)), w = share(c, i) / (s * s);
        powers(v, t);
        for (int j = 0; j < TERMS; j++) {
            for (int k = 0; k < TERMS; k++)
                m[j * TERMS + k] += w * t[j] * t[k];
            b[j] += w * t[j] * q;
        }
    }
    memcpy(copy, m, sizeof m);
    if (lstub__rsolve(copy, TERMS, TERMS, b, 1, 1) < 0)
        return 0;
    memcpy(p->a, b, sizeof b);
    memset(p->inverse, 0, sizeof p->inverse);
    for (int j = 0; j < TERMS; j++)
        p->inverse[j * TERMS + j] = 1.0;
    return lstub__rsolve(m, TERMS, TERMS, p->inverse, TERMS, TERMS) == 0;
}

/* Moves the centre to the minimum of the cubic; how far, in v. */
static double recentre(cubic *p, range r, const lstub__curve *c)
{
    double low = v_of(c->f[r.from], p->centre), high = v_of(c->f[r.to], p->centre);
    double b = p->a[1], a = p->a[2], e = 3.0 * p->a[3], root = a * a - e * b;
    double v = root >= 0.0 && a + sqrt(root) > 0.0 ? -b / (a + sqrt(root)) : NAN;     /* of a1 + 2 a2 v + 3 a3 v^2 */
    if (!(v > low && v < high))
        return NAN;
    p->centre = f_of(v, p->centre);
    return fabs(v);
}

/* Covariance of the coefficients from sums of what neighbours contribute together, as neighbours are not independent. */
static void covariance(const lstub__curve *c, range r, const cubic *p, double *cov)
{
    double sums[BLOCKS][TERMS] = {{0.0}}, meat[TERMS * TERMS] = {0.0}, t[TERMS], half[TERMS * TERMS];
    double width = c->f[r.to] - c->f[r.from];
    int blocks = (int)fmin(BLOCKS, fmax(8.0, width / (2.0 * c->window)));
    for (size_t i = r.from; i <= r.to; i++) {
        double v = v_of(c->f[i], p->centre), m = value(p, v), s = sigma_of(p, m), w = share(c, i) / (s * s);
        int k = (int)((c->f[i] - c->f[r.from]) / width * blocks);
        powers(v, t);
        for (int j = 0; j < TERMS; j++)
            sums[k < blocks ? k : blocks - 1][j] += w * t[j] * (q_of(c, i) - m);
    }
    for (int k = 0; k < blocks; k++)
        for (int i = 0; i < TERMS * TERMS; i++)
            meat[i] += sums[k][i / TERMS] * sums[k][i % TERMS] * blocks / (blocks - TERMS);
    for (int i = 0; i < TERMS; i++)
        for (int j = 0; j < TERMS; j++) {
            half[i * TERMS + j] = 0.0;
            for (int k = 0; k < TERMS; k++)
                half[i * TERMS + j] += p->inverse[i * TERMS + k] * meat[k * TERMS + j];
        }
    for (int i = 0; i < TERMS; i++)
        for (int j = 0; j < TERMS; j++) {
            cov[i * TERMS + j] = 0.0;
            for (int k = 0; k < TERMS; k++)
                cov[i * TERMS + j] += half[i * TERMS + k] * p->inverse[k * TERMS + j];
        }
}

/*
** Standard error of a1 by a ripple of 1 dB rms, over periods from a fifth of the range to four times it, all as likely: a
** shorter one averages out, a longer one is one factor for all.
*/
static double ripple_error(const lstub__curve *c, range r, const cubic *p)
{
    double width = c->f[r.to] - c->f[r.from], sum = 0.0, t[TERMS];
    const int steps = 10;
    for (int k = 0; k < steps; k++) {
        double re = 0.0, im = 0.0, periods = 0.25 * pow(20.0, (double)k / (steps - 1));
        for (size_t i = r.from; i <= r.to; i++) {
            double v = v_of(c->f[i], p->centre), m = value(p, v), s = sigma_of(p, m), w = share(c, i) / (s * s), a1 = 0.0;
            double phase = 2.0 * LSTUB_PI * periods * (c->f[i] - p->centre) / width;
            powers(v, t);
            for (int j = 0; j < TERMS; j++)
                a1 += p->inverse[TERMS + j] * t[j];
            a1 *= w * m * (1.0 + m);
            re += a1 * cos(phase);
            im += a1 * sin(phase);
        }
        sum += re * re + im * im;
    }
    return 0.1 * log(10.0) * sqrt(sum / steps);
}

int lstub__shape_fit(const lstub__curve *c, const lstub__dip *dip, lstub__shape *shape)
{
    range r = flanks(c, dip);
    double cov[TERMS * TERMS], d = pow(10.0, -0.05 * dip->depth);
    cubic p;
    if (r.to - r.from < 2 * TERMS)
        return 0;
    memset(&p, 0, sizeof p);
    p.centre = c->f[dip->at];
    p.lift = 0.05 * d / (1.0 - d);
    for (int turn = 0; turn < TURNS; turn++)
        if (!solve(c, r, &p, turn == 0) || !(recentre(&p, r, c) < 1.0))
            return 0;
    if (!solve(c, r, &p, 0) || !(p.a[2] > 0.0))
        return 0;
    covariance(c, r, &p, cov);
    double blur = 0.5 * LSTUB_PI * c->window / p.centre, per_v = 2.0 / LSTUB_PI * p.centre;
    shape->f = p.centre;
    shape->floor = p.a[0] - p.a[2] * blur * blur / 12.0;
    shape->floor_sigma = sqrt(cov[0]);
    double resistance = shape->floor > 0.0 ? shape->floor + sqrt(shape->floor * shape->floor + shape->floor) : 0.0;
    shape->zeta = sqrt(p.a[2] * (1.0 + 2.0 * resistance));
    shape->f_sigma = per_v * sqrt(cov[TERMS + 1]) / (2.0 * p.a[2]);
    shape->f_ripple = per_v * ripple_error(c, r, &p) / (2.0 * p.a[2]);
    return 1;
}

double lstub__shape_db(const lstub__shape *s, double f)
{
    double v = v_of(f, s->f), r = s->floor > 0.0 ? s->floor + sqrt(s->floor * s->floor + s->floor) : 0.0;
    double q = (r * r + s->zeta * s->zeta * v * v) / (1.0 + 2.0 * r);
    return f < 2.0 * s->f && q > 0.0 ? 10.0 * log10(q / (1.0 + q)) : 0.0;
}

double lstub__shape_q(const lstub__shape *s)
{
    double d = 2.0 * s->floor / (1.0 + s->floor), r = s->floor + sqrt(s->floor * s->floor + s->floor);
    if (!(s->floor > 0.0) || d >= 1.0)
        return NAN;
    double v = sqrt((d / (1.0 - d) - s->floor) * (1.0 + 2.0 * r)) / s->zeta;
    return 1.0 / (4.0 / LSTUB_PI * atan(v));
}
