/*
** The evanescent modes n >= 1 of one slab, summed over all pairs of rims.
**
** Mode n of a slab of height h has kappa^2 = (n pi/h)^2/ratio - u, u = eps_z k0^2. What two annuli exchange through it
** is the second difference in x and y of
**
**     F(x, y) = (2/kappa^2) (ln min - e1(min) e2(max)/D)
**
** with e1 = I0 - T K0 zero at the barrel, e2 = K0 - Q I0 zero at the wall, D = 1 - T Q. As functions of u these are
** analytic up to the first radial resonance of the mode: a short Chebyshev series per mode, shorter the higher n.
** Above n = N the Bessel functions are replaced by Hankel's expansion, whose sums over n are polylogarithms; without
** that, rims a micrometre apart would need thousands of modes.
**
** Below a drilled end the slab has two radial dielectrics. Then phi = integral of H_phi of the inner solution, psi of
** the outer one, continuous at the hole's radius, and F = lambda(min) - phi(min) psi(max)/w.
*/
#include "model/cavity_parts.h"
#include "num/bessel.h"
#include "num/polylog.h"

#include <float.h>
#include <string.h>

static double first_resonance(const cav_slab *slab)
{
    if (slab->outer != LSTUB__CAV_WALL) return 0.0;
    if (slab->r_in > 0.0) {
        double k = 0.9 * LSTUB_PI / (slab->r_out - slab->r_in);
        return k * k;
    }
    return slab->fill >= 0 ? 0.0 : (2.404 / slab->r_out) * (2.404 / slab->r_out);
}

static double cut_off(const cav_slab *slab, double ratio, int n)
{
    double k = n * LSTUB_PI / slab->h;
    return k * k / ratio + first_resonance(slab);
}

/* Terms of a series on 0 .. u_max for a function analytic below u_c that counts for 1/n^2.5. */
static int degree_of(double u_max, double u_c, int n)
{
    double z = 2.0 * u_c / u_max - 1.0, d;

    d = ceil((30.0 - 2.5 * log((double)n)) / log(z + sqrt(z * z - 1.0)));
    return d < 2.0 ? 2 : d > CAV_DEGREE ? CAV_DEGREE : (int)d;
}

void cav_modes_plan(const cav_slab *slab, double ratio, double u_top, cav_series *series)
{
    double limit = 0.0, k = LSTUB_PI / slab->h;
    int first;

    for (first = 1; first <= 3; first++) {      /* half way to the resonance, and kappa stays real */
        limit = fmin(0.5 * cut_off(slab, ratio, first), 0.95 * first * first * k * k / ratio);
        if (u_top <= limit) break;
    }
    if (first > 3) first = 3;
    series->first = first;
    series->u_max = fmin(u_top, limit);
    series->degree = degree_of(series->u_max, cut_off(slab, ratio, first), 1);
    if (series->degree < 5) series->degree = 5;
}

/* ---- one mode ----------------------------------------------------------------------------------- */

typedef struct mode_values {
    double phi[2 * LSTUB__CAV_POINTS], psi[2 * LSTUB__CAV_POINTS], lambda[2 * LSTUB__CAV_POINTS];
    double step[2 * LSTUB__CAV_POINTS];         /* e^-(chi_p+1 - chi_p) */
} mode_values;

/* phi e^-chi, psi e^chi with psi divided by w; homogeneous slab. */
static void plain_mode(const cav_slab *slab, double kappa2, const double *x, const double *log_x, int points,
                       mode_values *v)
{
    double kappa = sqrt(kappa2), inverse = 1.0 / kappa2, t = 0.0, q = 0.0, d = 1.0, i, k;
    int wall = slab->outer == LSTUB__CAV_WALL, p;

    if (slab->r_in > 0.0) { lstub__bessel_ik0(kappa * slab->r_in, &i, &k); t = i / k; }
    if (wall) { lstub__bessel_ik0(kappa * slab->r_out, &i, &k); q = k / i; }
    if (wall && t > 0.0) d = 1.0 - t * q * exp(-2.0 * kappa * (slab->r_out - slab->r_in));
    d = inverse / d;
    for (p = 0; p < points; p++) {
        lstub__bessel_ik0(kappa * x[p], &i, &k);
        v->phi[p] = t > 0.0 ? i - t * k * exp(-2.0 * kappa * (x[p] - slab->r_in)) : i;
        v->psi[p] = d * (wall ? k - q * i * exp(-2.0 * kappa * (slab->r_out - x[p])) : k);
        v->lambda[p] = inverse * log_x[p];
        v->step[p] = p + 1 < points ? exp(-kappa * (x[p + 1] - x[p])) : 0.0;
    }
}

/* The same with a hole of another dielectric, no barrel. qf: permittivity of the fill over the slab's. */
static void hole_mode(const cav_slab *slab, double kappa2, double fill2, double qf, const double *x,
                      const double *log_x, int points, mode_values *v)
{
    double kappa = sqrt(kappa2), kf = sqrt(fill2), rd = slab->hole, q = 0.0, ex = 0.0, g, t, qi, s, sigma, c1, c2, w;
    lstub__ik a, b, m;
    int wall = slab->outer == LSTUB__CAV_WALL, p, inside;
    double shift = 0.0, jump;

    lstub__bessel_ik(kappa * rd, &a);           /* laminate side */
    lstub__bessel_ik(kf * rd, &b);              /* hole side */
    if (wall) {
        lstub__bessel_ik(kappa * slab->r_out, &m);
        q = m.k0 / m.i0;
        ex = q * exp(-2.0 * kappa * (slab->r_out - rd));
    }
    /* inner solution: I in the hole, I0 - T K0 outside; E_z and H_phi continuous */
    g = kf / qf * b.i0 / b.i1;
    t = (kappa * a.i0 - g * a.i1) / (kappa * a.k0 + g * a.k1);          /* times e^(2 kappa rd) */
    s = (a.i1 + t * a.k1) / b.i1;                                       /* times e^((kappa - kf) rd) */
    c1 = s * b.i0 / kf - (a.i0 - t * a.k0) / kappa;                     /* times e^(kappa rd) */
    /* outer solution: K0 - Q I0 outside, sigma (K0 - Qi I0) in the hole */
    g = kappa * (a.k0 - ex * a.i0) / (a.k1 + ex * a.i1);
    qi = (kf / qf * b.k0 - g * b.k1) / (kf / qf * b.i0 + g * b.i1);     /* times e^(-2 kf rd)... scaled */
    sigma = (a.k1 + ex * a.i1) / (b.k1 + qi * b.i1);                    /* times e^(-(kappa - kf) rd) */
    c2 = (a.k0 - ex * a.i0) / kappa - sigma * (b.k0 - qi * b.i0) / kf;  /* times e^(-kappa rd) */
    w = 1.0 - t * ex;
    for (p = 0; p < points; p++) {
        double k = x[p] < rd ? kf : kappa, d = k * (x[p] - rd), i, kk;

        inside = x[p] < rd;
        lstub__bessel_ik0(k * x[p], &i, &kk);
        if (inside) {                           /* d < 0; chi = kappa rd + d */
            v->phi[p] = s * i / kf;
            v->psi[p] = (sigma * (kk - qi * i * exp(2.0 * d)) / kf + c2 * exp(d)) / w;
            v->lambda[p] = qf / fill2 * log_x[p] + c2 * v->phi[p] * exp(d) / w;
        } else {
            v->phi[p] = (i - t * kk * exp(-2.0 * d)) / kappa + c1 * exp(-d);
            v->psi[p] = (wall ? kk - q * i * exp(-2.0 * kappa * (slab->r_out - x[p])) : kk) / (kappa * w);
            v->lambda[p] = log_x[p] / kappa2 - c1 * v->psi[p] * exp(-d);
        }
    }
    /* lambda is continuous at the hole's radius */
    jump = qf / fill2 * log(rd) + c2 * s * b.i0 / kf / w
         - (log(rd) / kappa2 - c1 * (a.k0 - ex * a.i0) / (kappa * w));
    for (p = 0; p < points; p++) {
        double chi = (x[p] < rd ? kf : kappa) * (x[p] - rd);
        if (x[p] >= rd) v->lambda[p] += jump;
        if (p > 0) v->step[p - 1] = exp(shift - chi);
        shift = chi;
    }
    v->step[points - 1] = 0.0;
}

static void add_mode(const mode_values *v, int points, double *sum)
{
    int p, q;

    for (p = 0; p < points; p++) {
        double run = v->phi[p];
        for (q = p; q < points; q++) {
            sum[q * (q + 1) / 2 + p] += 2.0 * (v->lambda[p] - run * v->psi[q]);
            run *= v->step[q];
        }
    }
}

/* ---- the rest of the modes ---------------------------------------------------------------------- */

typedef struct tail_sums { double value[4]; } tail_sums;    /* sums of n^-(3+k) e^(-n c), n > N */

/* [0]: even n, [1]: odd n */
static void exponential_tails(double c, int last, tail_sums out[2])
{
    double all[4], twice[4], e = 1.0, step = exp(-c);
    int k, n;

    lstub__polylog(c, all);
    lstub__polylog(2.0 * c, twice);
    for (k = 0; k < 4; k++) {
        double even = twice[k] * ldexp(1.0, -(3 + k));
        out[0].value[k] = even;
        out[1].value[k] = all[k] - even;
    }
    for (n = 1; n <= last; n++) {
        double inverse = 1.0 / n, term;
        e *= step;
        term = e * inverse * inverse * inverse;
        for (k = 0; k < 4; k++) { out[n & 1].value[k] -= term; term *= inverse; }
    }
}

/* Adds -sign sum over n > N of 2 e^(-kappa d)/(2 kappa^3 sqrt(xy)) (1 + c1/kappa + c2/kappa^2) to value and slope in u. */
static void add_tail(double sign, double d, double gamma, int last, double root, double c1, double c2,
                     double value[2], double slope[2])
{
    tail_sums t[2];
    double g = 1.0 / gamma, f = sign * root * g * g * g;
    int par;

    if (gamma * d * (last + 1) > 34.0) return;
    exponential_tails(gamma * d, last, t);
    for (par = 0; par < 2; par++) {
        const double *s = t[par].value;
        value[par] -= f * (s[0] + g * (c1 * s[1] + g * c2 * s[2]));
        slope[par] -= f * g * (0.5 * d * (s[1] + g * c1 * s[2]) + 1.5 * g * (s[2] + g * c1 * s[3]));
    }
}

/* Tails of the exponential part for rims x <= y, first order in u. */
static void pair_tail(const cav_slab *slab, double gamma, int last, double x, double y, double value[2], double slope[2])
{
    double root = 1.0 / sqrt(x * y), ix = 1.0 / x, iy = 1.0 / y, a, squares = 9.0 / 128.0 * (ix * ix + iy * iy);

    value[0] = value[1] = slope[0] = slope[1] = 0.0;
    if (slab->r_in > 0.0 && x <= slab->r_in * (1.0 + 1e-14)) return;        /* e1 = 0 on the barrel */
    if (slab->outer == LSTUB__CAV_WALL && y >= slab->r_out * (1.0 - 1e-14)) return;
    add_tail(1.0, y - x, gamma, last, root, 0.125 * (ix - iy), squares - root * root / 64.0, value, slope);
    if (slab->r_in > 0.0) {
        a = 1.0 / slab->r_in;
        add_tail(-1.0, x + y - 2.0 * slab->r_in, gamma, last, root, 0.125 * (2.0 * a - ix - iy),
                 squares + root * root / 64.0 + a * a / 32.0 - a * (ix + iy) / 32.0, value, slope);
    }
    if (slab->outer == LSTUB__CAV_WALL) {
        a = 1.0 / slab->r_out;
        add_tail(-1.0, 2.0 * slab->r_out - x - y, gamma, last, root, 0.125 * (ix + iy - 2.0 * a),
                 squares + root * root / 64.0 + a * a / 32.0 - a * (ix + iy) / 32.0, value, slope);
    }
}

/*
** The same with a hole, no barrel, to leading order at its radius: waves are reflected by -t seen from outside, t from
** inside; phi and psi jump there by the ratio `step` of the permittivities in the plane, which adds terms that depend on
** one rim (left out: second differences do not see them), on the rim in the hole, and a constant outside.
*/
static void hole_pair_tail(const cav_slab *slab, double ratio, double qf, int last, double x, double y, double value[2],
                           double slope[2])
{
    double g = LSTUB_PI / slab->h, out = g / sqrt(ratio), t = (out - g / qf) / (out + g / qf), rd = slab->hole;
    double step = qf / ratio, root = 1.0 / sqrt(x * y), ix = 1.0 / x, iy = 1.0 / y;
    double squares = 9.0 / 128.0 * (ix * ix + iy * iy) - root * root / 64.0, f = 1.0 - t;
    int par;

    value[0] = value[1] = slope[0] = slope[1] = 0.0;
    if (y < rd) {
        add_tail(1.0, y - x, g, last, root, 0.125 * (ix - iy), squares, value, slope);
        add_tail(t, 2.0 * rd - x - y, g, last, root, 0.0, 0.0, value, slope);
        for (par = 0; par < 2; par++) { value[par] *= qf; slope[par] *= qf * qf; }
    } else if (x >= rd) {
        add_tail(f * (1.0 - step) * (1.0 - step), 0.0, out, last, 1.0 / rd, 0.0, 0.0, value, slope);
        if (slab->outer == LSTUB__CAV_WALL && y >= slab->r_out * (1.0 - 1e-14)) return;
        add_tail(1.0, y - x, out, last, root, 0.125 * (ix - iy), squares, value, slope);
        add_tail(-t, x + y - 2.0 * rd, out, last, root, 0.0, 0.0, value, slope);
        if (slab->outer == LSTUB__CAV_WALL)
            add_tail(-1.0, 2.0 * slab->r_out - x - y, out, last, root, 0.0, 0.0, value, slope);
    } else {
        double inside = (rd - x) * g / out;
        add_tail(f * step, y - rd + inside, out, last, root, 0.0, 0.0, value, slope);
        add_tail(f * (1.0 - step), y - rd, out, last, 1.0 / sqrt(rd * y), 0.0, 0.0, value, slope);
        add_tail(-f * (1.0 - step) * step, inside, out, last, 1.0 / sqrt(rd * x), 0.0, 0.0, value, slope);
    }
}

/* z[k] = sum over n > last, n of that parity, of n^-(2k+2) */
static void zeta_tails(int last, int parity, double z[4])
{
    static const double zeta[4] = { 1.6449340668482264365, 1.0823232337111381915, 1.0173430619844491397,
                                    1.0040773561979443394 };    /* zeta(2), (4), (6), (8) */
    int k, n;

    for (k = 0; k < 4; k++) {
        double even = ldexp(zeta[k], -2 * (k + 1));
        z[k] = parity ? zeta[k] - even : even;
    }
    for (n = last - (last + parity) % 2; n > 0; n -= 2) {
        double inverse = 1.0 / ((double)n * n), term = inverse;
        for (k = 0; k < 4; k++) { z[k] -= term; term *= inverse; }
    }
}

/* sum over the same n of 2/(beta n^2 - u) */
static double log_tail(const double z[4], double beta, double u)
{
    double r = u / beta;

    return 2.0 / beta * (z[0] + r * (z[1] + r * (z[2] + r * z[3])));
}

/* ---- sums --------------------------------------------------------------------------------------- */

size_t cav_modes_scratch(int points)
{
    return (size_t)(CAV_DEGREE + 1) * (size_t)(points * (points + 1));
}

static void zero(double *v, size_t n) { memset(v, 0, n * sizeof *v); }

/* Adds the Chebyshev coefficients of values at the nodes to a series. */
static void add_series(const double *values, int degree, int pairs, double *series)
{
    int n = degree + 1, k, j, p;

    for (j = 0; j < n; j++) {
        double t = cos(LSTUB_PI * (j + 0.5) / n), c = 1.0 / n, before = t * c, next;
        for (k = 0; k < n; k++) {               /* c = T_k(t)/n, twice that from k = 1 on */
            double f = k ? 2.0 * c : c;
            for (p = 0; p < pairs; p++) series[k * pairs + p] += f * values[j * pairs + p];
            next = 2.0 * t * c - before;
            before = c;
            c = next;
        }
    }
}

static double node(double u_max, int j, int degree)
{
    return 0.5 * u_max * (1.0 + cos(LSTUB_PI * (j + 0.5) / (degree + 1)));
}

static void add_tails(const cav_slab *slab, double ratio, double qf, const double *x, const double *log_x, int points,
                      int last, const cav_series *s)
{
    double gamma = LSTUB_PI / slab->h, beta = gamma * gamma, log_hole = slab->fill >= 0 ? log(slab->hole) : 0.0;
    double half = 0.5 * s->u_max;
    int p, q, par, k, j, n = 5;

    for (par = 0; par < 2; par++) {             /* the logarithm, as a series of degree 4 */
        double *series = par ? s->odd : s->even, z[4];
        zeta_tails(last, par, z);
        for (k = 0; k < n; k++) {
            double in_slab = 0.0, in_hole = 0.0;
            for (j = 0; j < n; j++) {
                double c = (k ? 2.0 : 1.0) / n * cos(k * LSTUB_PI * (j + 0.5) / n), u = node(s->u_max, j, n - 1);
                in_slab += c * log_tail(z, beta / ratio, u);
                if (slab->fill >= 0) in_hole += c * qf * log_tail(z, beta, qf * u);
            }
            for (q = 0; q < points; q++) {
                for (p = 0; p <= q; p++) {
                    double l = slab->fill < 0 ? in_slab * log_x[p]
                             : x[p] < slab->hole ? in_hole * log_x[p]
                             : in_hole * log_hole + in_slab * (log_x[p] - log_hole);
                    series[k * s->pairs + q * (q + 1) / 2 + p] += l;
                }
            }
        }
    }
    for (q = 0; q < points; q++) {
        for (p = 0; p <= q; p++) {
            double value[2], slope[2];
            int at = q * (q + 1) / 2 + p;

            if (slab->fill >= 0) hole_pair_tail(slab, ratio, qf, last, x[p], x[q], value, slope);
            else pair_tail(slab, gamma / sqrt(ratio), last, x[p], x[q], value, slope);
            for (par = 0; par < 2; par++) {
                double *series = par ? s->odd : s->even;
                series[at] += value[par] + slope[par] * half;
                series[s->pairs + at] += slope[par] * half;
            }
        }
    }
}

void cav_modes_sum(const cav_slab *slab, double ratio, double qf, const double *x, const double *log_x, int points,
                   const cav_series *s, double *scratch)
{
    double gamma = LSTUB_PI / (slab->h * sqrt(ratio)), k1 = LSTUB_PI / slab->h;
    size_t block = (size_t)s->pairs * (size_t)(s->degree + 1);
    double *values[2];
    int last, n, degree = -1, j;
    mode_values v;

    /* Hankel's expansion is good from kappa x = 20 on */
    last = (int)ceil(20.0 / (gamma * x[0]));
    if (last < (slab->fill >= 0 ? 24 : 12)) last = slab->fill >= 0 ? 24 : 12;
    if (last > 2000) last = 2000;
    last += last & 1;
    values[0] = scratch;
    values[1] = scratch + block;
    zero(s->even, block);
    zero(s->odd, block);
    zero(s->low_even, (size_t)s->pairs);
    zero(s->low_odd, (size_t)s->pairs);
    for (n = 1; n < s->first; n++) {
        double k2 = n * k1 * n * k1;
        if (slab->fill >= 0) hole_mode(slab, k2 / ratio, k2, qf, x, log_x, points, &v);
        else plain_mode(slab, k2 / ratio, x, log_x, points, &v);
        add_mode(&v, points, n & 1 ? s->low_odd : s->low_even);
    }
    for (n = s->first; n <= last + 1; n++) {
        int d = n > last ? -2 : degree_of(s->u_max, cut_off(slab, ratio, n), n);

        if (d > s->degree) d = s->degree;
        if (d != degree) {                      /* modes of one length share their nodes */
            if (degree > 0) {
                add_series(values[0], degree, s->pairs, s->even);
                add_series(values[1], degree, s->pairs, s->odd);
            }
            if (n > last) break;
            degree = d;
            zero(values[0], (size_t)s->pairs * (size_t)(d + 1));
            zero(values[1], (size_t)s->pairs * (size_t)(d + 1));
        }
        for (j = 0; j <= d; j++) {
            double u = node(s->u_max, j, d), k2 = n * k1 * n * k1;
            if (slab->fill >= 0) hole_mode(slab, k2 / ratio - u, k2 - qf * u, qf, x, log_x, points, &v);
            else plain_mode(slab, k2 / ratio - u, x, log_x, points, &v);
            add_mode(&v, points, values[n & 1] + (size_t)j * (size_t)s->pairs);
        }
    }
    add_tails(slab, ratio, qf, x, log_x, points, last, s);
}
