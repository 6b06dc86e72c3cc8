/*
** One frequency of a compiled cavity model, without a single allocation.
**
** Admittances are in units of 2 pi jw eps0. A slab ties the currents of its faces, downwards, to their voltages,
**
**     I_top = T V_top - C V_bottom,   I_bottom = C' V_top - B V_bottom,
**
** and what hangs below, I_bottom = Y V_bottom, becomes Y <- T - C (Y + B)^-1 C'. Mode 0 contains the inductance of the
** slab: a huge rank-one term at low frequency, which is carried apart so that nothing cancels.
*/
#include "model/cavity_model.h"
#include "num/bessel.h"
#include "num/dense.h"

#include <string.h>

#define N      LSTUB__CAV_CELLS
#define P      LSTUB__CAV_POINTS
#define STORED 12                   /* sets of rims whose Bessel functions are kept                      */
#define SINGLE 24                   /* radii, the same                                                   */
#define BLOCKS 6                    /* kernels whose matrices are kept                                   */
#define SMALL  8                    /* cells of those                                                    */

typedef struct rim_store {          /* what mode 0 needs at a set of rims */
    int medium, rims, small;
    double r_in;                    /* of the barrel, where small */
    cplx i[P], s[P], l[P];      /* small, barrel: phi, psi, lambda of barrel_waves; small, no barrel: (I0 - 1)/kappa^2 */
} rim_store;                        /* and S/kappa^2, S = K0 + (ln(kappa x/2) + gamma) I0; otherwise I0, K0 */

typedef struct radius_store {
    int medium;
    double r;
    cplx i0, k0;
} radius_store;

/* A slab's admittances, and mode 0's rank-one term -(top, -bottom)(top, -bottom)'/loop kept apart from them. */
typedef struct block {
    cplx *tt, *bb, *tb, *top, *bottom;
    cplx loop;                  /* 0: mode 0 is in the matrices */
} block;

typedef struct kept_block {         /* of slabs whose faces are alike */
    int kernel;
    cplx tt[SMALL * SMALL], bb[SMALL * SMALL], tb[SMALL * SMALL], top[SMALL], loop;
} kept_block;

typedef struct state {
    const lstub__cavity *m;
    const cplx *eps;
    double k0;
    cplx kappa[LSTUB__CAV_MEDIA], gamma[LSTUB__CAV_MEDIA];
    int ring_known[LSTUB__CAV_MEDIA];
    int stored, singles, blocks;
    rim_store rim[STORED];
    radius_store radius[SINGLE];
    kept_block kept[BLOCKS];
} state;

/* A mode at the rims of a face: F(x, y) = lambda(min) - phi(min) psi(max). */
typedef struct mode_at {
    cplx phi[P], psi[P], lambda[P];
    cplx log_factor;            /* lambda = log_factor ln x where `plain`                    */
    cplx loop;                  /* k0^2/rho: mode 0 has the term -phi(x) phi(y)/loop besides; 0: none */
    int plain;
} mode_at;

/* What a mode's solutions are in a slab. Inner: I0 - T K0 (in a hole s I0, plus c1 outside), outer: K0 - Q I0. */
typedef struct mode_form {
    cplx kappa, t, q, scale;    /* scale: 1/(kappa^2 D), with the slab's permittivity */
    int hole, small;                /* small: mode 0, all of it at small kappa rho */
    cplx kf, s, sigma, qi, c1, c2, inner_log, outer_log, jump, w;
} mode_form;

/* ---- Bessel functions, computed once ------------------------------------------------------------ */

static const radius_store *at_radius(state *w, int medium, double r)
{
    int i;

    for (i = 0; i < w->singles && i < SINGLE; i++)
        if (w->radius[i].medium == medium && w->radius[i].r == r) return &w->radius[i];
    i = w->singles++ % SINGLE;
    w->radius[i].medium = medium;
    w->radius[i].r = r;
    lstub__bessel_zik0(cplx_scale(w->kappa[medium], r), &w->radius[i].i0, &w->radius[i].k0);
    return &w->radius[i];
}

/* (I0(z) - 1)/kappa^2 and the part of K0 that is not logarithmic, over kappa^2, z = kappa x. */
static void small_waves(cplx kappa, double x, cplx *i, cplx *s)
{
    double quarter = 0.25 * x * x, h = 1.0;
    cplx q = cplx_scale(cplx_mul(kappa, kappa), quarter), t = cplx_of(quarter, 0.0), a = t, b = t;
    int n;

    for (n = 2; n < 40; n++) {
        double inverse = 1.0 / n;
        t = cplx_scale(cplx_mul(t, q), inverse * inverse);
        h += inverse;
        a = cplx_add(a, t);
        b.re += h * t.re;
        b.im += h * t.im;
        if (cplx_norm(t) < 1e-34 * quarter * quarter) break;
    }
    *i = a;
    *s = b;
}

/*
** Mode 0 where kappa x is small, without the cancellation of ln x against Bessel functions. With a barrel, U = K0(a) I0(x) -
** I0(a) K0(x) = ln(x/a) + kappa^2 u and P = kappa a (K1(a) I0(x) + I1(a) K0(x)) = 1 + kappa^2 p,
**
**     F = -(rho/k0^2) U(x) U(y) - eps (u(min) + p(max) U(min)),
**
** where rho = kappa a (K1 + Q I1)/(K0 - Q I0) at the barrel is the radial admittance seen from there; its term, the
** inductance of the slab, is kept apart as `loop`. Without barrel
**
**     F = eps (s(min) - i(min) ln min + i(min) [(1 + kappa^2 i) ln - kappa^2 s + (L + Q) kappa^2 i](max)), L = ln(kappa/2) + gamma.
*/
static void barrel_waves(cplx k2, double a, double l, cplx ia, cplx sa, cplx i1, cplx k1, cplx i,
                         cplx s, cplx *u, cplx *p)
{
    cplx one_i = cplx_mul(k2, i), one_a = cplx_mul(k2, ia), t;

    one_i.re += 1.0;
    one_a.re += 1.0;
    t = cplx_scale(cplx_fma(ia, one_a, i), l);
    t = cplx_fma(t, sa, one_i);
    *u = cplx_fms(t, s, one_a);
    t = cplx_mul(cplx_fma(k1, i1, cplx_of(l, 0.0)), one_i);
    t = cplx_sub(cplx_mul(cplx_mul(k2, i1), s), t);
    *p = cplx_add(i, cplx_scale(t, a * a));
}

/* I1(z)/z and the part of K1(z)/z that is neither 1/z^2 nor logarithmic, negated. */
static void small_first(cplx k2, double a, cplx *i1, cplx *k1)
{
    cplx q = cplx_scale(k2, 0.25 * a * a), t = cplx_of(1.0, 0.0);
    double h = 0.0;
    int n;

    *i1 = cplx_of(0.5, 0.0);
    *k1 = cplx_of(0.25, 0.0);
    for (n = 1; n < 40; n++) {
        double inverse = 1.0 / n, next = 0.5 / (n + 1);
        t = cplx_scale(cplx_mul(t, q), inverse * inverse);
        h += inverse;
        i1->re += next * t.re; i1->im += next * t.im;
        k1->re += next * (h + next) * t.re; k1->im += next * (h + next) * t.im;
        if (cplx_norm(t) < 1e-34) break;
    }
}

/* Mode 0 with a barrel at the rims of a face, but for the loop: see small_mode. */
static void barrel_rims(cplx kappa, cplx eps, double a, const cav_opening *o, rim_store *r)
{
    cplx k2 = cplx_mul(kappa, kappa), ia, sa, i1, k1, u, q, i, s;
    double log_a = log(a);
    int p;

    small_waves(kappa, a, &ia, &sa);
    small_first(k2, a, &i1, &k1);
    for (p = 0; p < o->points; p++) {
        double l = o->log_x[p] - log_a;
        small_waves(kappa, o->x[p], &i, &s);
        barrel_waves(k2, a, l, ia, sa, i1, k1, i, s, &u, &q);
        r->i[p] = cplx_mul(k2, u);
        r->i[p].re += l;
        r->s[p] = cplx_mul(eps, q);
        r->l[p] = cplx_neg(cplx_mul(eps, u));
    }
}

static const rim_store *at_rims(state *w, int medium, const cav_opening *o, double r_in, int small)
{
    int i, p;
    rim_store *r;

    for (i = 0; i < w->stored && i < STORED; i++) {
        r = &w->rim[i];
        if (r->medium == medium && r->rims == o->same_rims && r->small == small
            && (!small || r->r_in == r_in)) return r;
    }
    r = &w->rim[w->stored++ % STORED];
    r->medium = medium;
    r->rims = o->same_rims;
    r->r_in = r_in;
    r->small = small;
    if (small && r_in > 0.0) { barrel_rims(w->kappa[medium], w->eps[medium], r_in, o, r); return r; }
    for (p = 0; p < o->points; p++) {
        if (small) small_waves(w->kappa[medium], o->x[p], &r->i[p], &r->s[p]);
        else lstub__bessel_zik0(cplx_scale(w->kappa[medium], o->x[p]), &r->i[p], &r->s[p]);
    }
    return r;
}

static cplx reflection(state *w, const cav_slab *s, int mode, cplx kappa)
{
    if (s->outer == LSTUB__CAV_WALL) {
        cplx i, k;
        if (mode == 0) {
            const radius_store *r = at_radius(w, s->medium, s->r_out);
            return cplx_div(r->k0, r->i0);
        }
        lstub__bessel_zik0(cplx_scale(kappa, s->r_out), &i, &k);
        return cplx_div(k, i);
    }
    if (s->outer == LSTUB__CAV_RING && mode == 0) {
        if (!w->ring_known[s->medium]) {
            w->gamma[s->medium] = cplx_neg(cav_ring(&w->m->returns, w->kappa[s->medium]));
            w->ring_known[s->medium] = 1;
        }
        return w->gamma[s->medium];
    }
    return cplx_of(0.0, 0.0);
}

/* ---- one mode, exactly -------------------------------------------------------------------------- */

static cplx wave_number(cplx eps, double ratio, double k0, int mode, double h)
{
    double b = mode * LSTUB_PI / h;
    cplx k2 = cplx_of(b * b / ratio - k0 * k0 * eps.re, -k0 * k0 * eps.im), k;

    k = cplx_sqrt(k2);
    return k2.im == 0.0 && k2.re < 0.0 ? cplx_of(0.0, fabs(k.im)) : k;    /* outgoing with exp(+jwt) */
}

static void hole_form(const cav_slab *s, cplx qf, cplx kf, mode_form *f)
{
    lstub__zik a, b;
    cplx e, g, x, y, z = cplx_scale(f->kappa, s->hole), zf = cplx_scale(kf, s->hole), one = cplx_of(1.0, 0.0);
    cplx log_rd = cplx_of(log(s->hole), 0.0);

    lstub__bessel_zik(z, &a);
    e = cplx_exp(z);
    a.i0 = cplx_mul(a.i0, e); a.i1 = cplx_mul(a.i1, e); a.k0 = cplx_div(a.k0, e); a.k1 = cplx_div(a.k1, e);
    lstub__bessel_zik(zf, &b);
    e = cplx_exp(zf);
    b.i0 = cplx_mul(b.i0, e); b.i1 = cplx_mul(b.i1, e); b.k0 = cplx_div(b.k0, e); b.k1 = cplx_div(b.k1, e);
    f->kf = kf;
    x = cplx_div(kf, qf);
    g = cplx_div(cplx_mul(x, b.i0), b.i1);
    f->t = cplx_div(cplx_fms(cplx_mul(f->kappa, a.i0), g, a.i1), cplx_fma(cplx_mul(f->kappa, a.k0), g, a.k1));
    f->s = cplx_div(cplx_fma(a.i1, f->t, a.k1), b.i1);
    y = cplx_fms(a.i0, f->t, a.k0);
    f->c1 = cplx_sub(cplx_div(cplx_mul(f->s, b.i0), kf), cplx_div(y, f->kappa));
    e = cplx_fms(a.k0, f->q, a.i0);
    y = cplx_fma(a.k1, f->q, a.i1);
    g = cplx_div(cplx_mul(f->kappa, e), y);
    f->qi = cplx_div(cplx_fms(cplx_mul(x, b.k0), g, b.k1), cplx_fma(cplx_mul(x, b.i0), g, b.i1));
    f->sigma = cplx_div(y, cplx_fma(b.k1, f->qi, b.i1));
    f->c2 = cplx_sub(cplx_div(e, f->kappa),
                        cplx_div(cplx_mul(f->sigma, cplx_fms(b.k0, f->qi, b.i0)), kf));
    f->w = cplx_inv(cplx_fms(one, f->t, f->q));
    f->inner_log = cplx_div(qf, cplx_mul(kf, kf));
    f->outer_log = cplx_inv(cplx_mul(f->kappa, f->kappa));
    x = cplx_mul(f->inner_log, log_rd);
    x = cplx_fma(x, cplx_mul(f->c2, f->w), cplx_div(cplx_mul(f->s, b.i0), kf));
    y = cplx_mul(f->outer_log, log_rd);
    y = cplx_fms(y, cplx_mul(f->c1, f->w), cplx_div(e, f->kappa));
    f->jump = cplx_sub(x, y);
}

/* Square of the greatest radius that counts in a slab. */
static double reach_of(const lstub__cavity *m, const cav_slab *s)
{
    const cav_opening *a = &m->opening[s->top], *b = s->bottom >= 0 ? &m->opening[s->bottom] : a;
    double r = a->x[a->points - 1];

    if (b->x[b->points - 1] > r) r = b->x[b->points - 1];
    if (s->outer == LSTUB__CAV_WALL && s->r_out > r) r = s->r_out;
    return r * r;
}

static void make_form(state *w, const cav_slab *s, int mode, mode_form *f)
{
    cplx d = cplx_of(1.0, 0.0), eps = w->eps[s->medium];
    double k0 = w->k0;

    f->hole = s->fill >= 0;
    f->small = mode == 0 && !f->hole && cplx_norm(w->kappa[s->medium]) * reach_of(w->m, s) < 30.0;
    f->kappa = mode == 0 ? w->kappa[s->medium] : wave_number(eps, w->m->ratio[s->medium], k0, mode, s->h);
    f->q = reflection(w, s, mode, f->kappa);
    f->t = cplx_of(0.0, 0.0);
    if (f->hole) {
        cplx ef = w->eps[s->fill];
        hole_form(s, cplx_div(ef, eps), wave_number(ef, 1.0, k0, mode, s->h), f);
        f->scale = eps;
        return;
    }
    if (s->r_in > 0.0) {
        if (mode == 0) {
            const radius_store *r = at_radius(w, s->medium, s->r_in);
            f->t = cplx_div(r->i0, r->k0);
        } else {
            cplx i, k;
            lstub__bessel_zik0(cplx_scale(f->kappa, s->r_in), &i, &k);
            f->t = cplx_div(i, k);
        }
        d = cplx_fms(d, f->t, f->q);
    }
    f->scale = mode == 0 ? cplx_of(-1.0 / (k0 * k0), 0.0) : cplx_div(eps, cplx_mul(f->kappa, f->kappa));
    f->w = cplx_div(f->scale, d);
}

static void hole_at(const mode_form *f, const cav_slab *s, const cav_opening *o, mode_at *v)
{
    int p;

    for (p = 0; p < o->points; p++) {
        int inside = o->x[p] < s->hole;
        cplx k = inside ? f->kf : f->kappa, i0, k0, psi;

        lstub__bessel_zik0(cplx_scale(k, o->x[p]), &i0, &k0);
        if (inside) {
            v->phi[p] = cplx_div(cplx_mul(f->s, i0), k);
            psi = cplx_fma(f->c2, cplx_div(f->sigma, k), cplx_fms(k0, f->qi, i0));
            v->psi[p] = cplx_mul(psi, f->w);
            v->lambda[p] = cplx_fma(cplx_scale(f->inner_log, o->log_x[p]), cplx_mul(f->c2, f->w), v->phi[p]);
        } else {
            v->phi[p] = cplx_add(cplx_div(cplx_fms(i0, f->t, k0), k), f->c1);
            v->psi[p] = cplx_mul(cplx_div(cplx_fms(k0, f->q, i0), k), f->w);
            v->lambda[p] = cplx_add(f->jump, cplx_fms(cplx_scale(f->outer_log, o->log_x[p]), f->c1, v->psi[p]));
        }
        v->psi[p] = cplx_mul(v->psi[p], f->scale);
        v->lambda[p] = cplx_mul(v->lambda[p], f->scale);
    }
    v->plain = 0;
}

/* Radial admittance at the barrel, kappa a (K1 + Q I1)/(K0 - Q I0); behind a wall P/U there. */
static cplx admittance(const mode_form *f, const cav_slab *s, cplx k2)
{
    double a = s->r_in;
    cplx rho, t;

    if (s->outer == LSTUB__CAV_WALL) {
        cplx ia, sa, i1, k1, ig, sg, u, p;
        small_waves(f->kappa, a, &ia, &sa);
        small_first(k2, a, &i1, &k1);
        small_waves(f->kappa, s->r_out, &ig, &sg);
        barrel_waves(k2, a, log(s->r_out / a), ia, sa, i1, k1, ig, sg, &u, &p);
        rho = cplx_mul(k2, p);
        rho.re += 1.0;
        t = cplx_mul(k2, u);
        t.re += log(s->r_out / a);
        return cplx_div(rho, t);
    } else {
        lstub__zik b;
        cplx e = cplx_mul(f->q, cplx_exp(cplx_scale(f->kappa, 2.0 * a)));
        lstub__bessel_zik(cplx_scale(f->kappa, a), &b);
        rho = cplx_div(cplx_fma(b.k1, e, b.i1), cplx_fms(b.k0, e, b.i0));
        return cplx_scale(cplx_mul(rho, f->kappa), a);
    }
}

static void small_mode(const state *w, const mode_form *f, const cav_slab *s, const cav_opening *o, const rim_store *r,
                       mode_at *v)
{
    cplx eps = w->eps[s->medium], k2 = cplx_scale(eps, -w->k0 * w->k0), t;
    int p;

    v->plain = 0;
    if (s->r_in <= 0.0) {
        double log_h = log(s->h);
        cplx l = cplx_log(f->kappa);
        l.re += 0.57721566490153286061 - 0.69314718055994530942 + log_h;
        l = cplx_add(l, f->q);
        for (p = 0; p < o->points; p++) {
            double log_p = o->log_x[p] - log_h;
            t = cplx_sub(cplx_mul(cplx_of(l.re + log_p, l.im), r->i[p]), r->s[p]);
            t = cplx_mul(k2, t);
            t.re += log_p;
            v->phi[p] = r->i[p];
            v->psi[p] = cplx_neg(cplx_mul(eps, t));
            v->lambda[p] = cplx_mul(eps, cplx_sub(r->s[p], cplx_scale(r->i[p], log_p)));
        }
        return;
    }
    v->loop = cplx_div(cplx_of(w->k0 * w->k0, 0.0), admittance(f, s, k2));
    memcpy(v->phi, r->i, (size_t)o->points * sizeof *r->i);
    memcpy(v->psi, r->s, (size_t)o->points * sizeof *r->s);
    memcpy(v->lambda, r->l, (size_t)o->points * sizeof *r->l);
}

static void mode_on(state *w, const mode_form *f, const cav_slab *s, const cav_opening *o, int mode, mode_at *v)
{
    const rim_store *r = NULL;
    int p, bare = s->r_in <= 0.0, open = f->q.re == 0.0 && f->q.im == 0.0;

    v->loop = cplx_of(0.0, 0.0);
    if (f->hole) { hole_at(f, s, o, v); return; }
    if (mode == 0) {
        r = at_rims(w, s->medium, o, s->r_in, f->small);
        if (f->small) { small_mode(w, f, s, o, r, v); return; }
    }
    v->plain = 1;
    v->log_factor = f->scale;
    for (p = 0; p < o->points; p++) {
        cplx i0, k0;
        if (r != NULL) { i0 = r->i[p]; k0 = r->s[p]; }
        else lstub__bessel_zik0(cplx_scale(f->kappa, o->x[p]), &i0, &k0);
        v->phi[p] = bare ? i0 : cplx_fms(i0, f->t, k0);
        v->psi[p] = cplx_mul(f->w, open ? k0 : cplx_fms(k0, f->q, i0));
    }
}

/* ---- a mode between two faces ------------------------------------------------------------------- */

static void sums(const cav_opening *o, const cplx *v, cplx *out)
{
    int r = o->refine, i, p;

    for (i = 0; i < o->cells; i++) {
        const double *c = o->c + i * (r + 1);
        cplx t = cplx_of(0.0, 0.0);
        for (p = 0; p <= r; p++) { t.re += c[p] * v[i * r + p].re; t.im += c[p] * v[i * r + p].im; }
        out[i] = t;
    }
}

static cplx lambda_at(const mode_at *v, const cav_opening *o, int p)
{
    return v->plain ? cplx_scale(v->log_factor, o->log_x[p]) : v->lambda[p];
}

/* Cells whose annuli may overlap, rim by rim. */
static cplx overlap(const mode_at *va, const cav_opening *a, int i, const mode_at *vb, const cav_opening *b, int j)
{
    cplx sum = cplx_of(0.0, 0.0);
    int p, q;

    for (p = i * a->refine; p <= (i + 1) * a->refine; p++) {
        for (q = j * b->refine; q <= (j + 1) * b->refine; q++) {
            double c = a->c[i * (a->refine + 1) + p - i * a->refine] * b->c[j * (b->refine + 1) + q - j * b->refine];
            cplx f = a->x[p] <= b->x[q] ? cplx_fms(lambda_at(va, a, p), va->phi[p], vb->psi[q])
                                            : cplx_fms(lambda_at(vb, b, q), vb->phi[q], va->psi[p]);
            sum.re += c * f.re;
            sum.im += c * f.im;
        }
    }
    return sum;
}

static cplx self(const mode_at *v, const cav_opening *o, int i)
{
    int r = o->refine, p;
    const double *c = o->c + i * (r + 1);
    const cplx *phi = v->phi + i * r, *psi = v->psi + i * r, *lambda = v->lambda + i * r;
    cplx sum = v->plain ? cplx_scale(v->log_factor, o->log_self[i]) : cplx_of(0.0, 0.0), t = cplx_of(0.0, 0.0);
    double rest = 0.0;

    for (p = r; p >= 0; p--) {          /* t, rest: twice what lies outside of rim p */
        cplx here = cplx_of(c[p] * psi[p].re, c[p] * psi[p].im);
        sum = cplx_fms(sum, cplx_scale(phi[p], c[p]), cplx_add(t, here));
        if (!v->plain) {
            double f = c[p] * (c[p] + rest);
            sum.re += f * lambda[p].re;
            sum.im += f * lambda[p].im;
        }
        t.re += 2.0 * here.re;
        t.im += 2.0 * here.im;
        rest += 2.0 * c[p];
    }
    return sum;
}

/* Adds sign times the mode to an n x n block of one face. */
static void add_own(const mode_at *v, const cav_opening *o, double sign, cplx *out)
{
    cplx alpha[N], beta[N];
    int n = o->cells, i, j;

    sums(o, v->phi, alpha);
    sums(o, v->psi, beta);
    for (i = 0; i < n; i++) {
        cplx s = cplx_scale(self(v, o, i), sign);
        out[i * n + i] = cplx_add(out[i * n + i], s);
        for (j = i + 1; j < n; j++) {
            s = cplx_scale(cplx_mul(alpha[i], beta[j]), -sign);
            out[i * n + j] = cplx_add(out[i * n + j], s);
            out[j * n + i] = cplx_add(out[j * n + i], s);
        }
    }
}

static void add_cross(const mode_at *va, const cav_opening *a, const mode_at *vb, const cav_opening *b, double sign,
                      cplx *out)
{
    cplx alpha_a[N], beta_a[N], alpha_b[N], beta_b[N], s;
    int i, j;

    sums(a, va->phi, alpha_a);
    sums(a, va->psi, beta_a);
    sums(b, vb->phi, alpha_b);
    sums(b, vb->psi, beta_b);
    for (i = 0; i < a->cells; i++) {
        for (j = 0; j < b->cells; j++) {
            cplx *to = &out[i * b->cells + j];
            if (a->x[(i + 1) * a->refine] <= b->x[j * b->refine]) s = cplx_neg(cplx_mul(alpha_a[i], beta_b[j]));
            else if (b->x[(j + 1) * b->refine] <= a->x[i * a->refine]) s = cplx_neg(cplx_mul(alpha_b[j], beta_a[i]));
            else s = overlap(va, a, i, vb, b, j);
            *to = cplx_add(*to, cplx_scale(s, sign));
        }
    }
}

/* ---- the evanescent modes ----------------------------------------------------------------------- */

static void series(const state *w, const cav_slab *s, const cav_kernel *k, cplx *out)
{
    cplx eps = w->eps[s->medium], u = cplx_scale(eps, w->k0 * w->k0), t, t0 = cplx_of(1.0, 0.0), t1, dq, factor;
    const double *c = k->coef, *cq = k->coef_q;
    int n = k->entries, d, e;

    t = cplx_of(2.0 * u.re / k->u_max - 1.0, 2.0 * u.im / k->u_max);
    t1 = t;
    dq = cplx_of(0.0, 0.0);
    if (cq != NULL) { dq = cplx_div(w->eps[s->fill], eps); dq.re -= k->q; }
    for (e = 0; e < n; e++) out[e] = cplx_of(c[e], 0.0);
    if (cq != NULL) for (e = 0; e < n; e++) { out[e].re += dq.re * cq[e]; out[e].im += dq.im * cq[e]; }
    for (d = 1; d <= k->degree; d++) {
        cplx next;
        c += n;
        for (e = 0; e < n; e++) { out[e].re += t1.re * c[e]; out[e].im += t1.im * c[e]; }
        if (cq != NULL) {
            cplx f = cplx_mul(dq, t1);
            cq += n;
            for (e = 0; e < n; e++) { out[e].re += f.re * cq[e]; out[e].im += f.im * cq[e]; }
        }
        next = cplx_fms(cplx_neg(t0), cplx_of(-2.0, 0.0), cplx_mul(t, t1));
        t0 = t1;
        t1 = next;
    }
    factor = cplx_scale(eps, 1.0 / s->h);
    for (e = 0; e < n; e++) out[e] = cplx_mul(out[e], factor);
}

static void unpack_triangle(const cplx *t, int n, cplx *out)
{
    int i, j;

    for (i = 0; i < n; i++) for (j = 0; j <= i; j++) out[i * n + j] = out[j * n + i] = *t++;
}

/* ---- steps of the cascade ----------------------------------------------------------------------- */

static void fill_same(state *w, const cav_slab *s, block *b)
{
    const cav_kernel *k = &w->m->kernel[s->kernel];
    const cav_opening *face = &w->m->opening[s->top];
    int n = face->cells, mode, i;
    cplx packed[N * (N + 1)];
    mode_form f;
    mode_at v;

    series(w, s, k, packed);
    unpack_triangle(packed, n, b->tt);
    unpack_triangle(packed + n * (n + 1) / 2, n, b->bb);            /* odd modes for now */
    for (mode = 0; mode < k->first; mode++) {
        make_form(w, s, mode, &f);
        mode_on(w, &f, s, face, mode, &v);
        add_own(&v, face, (mode ? 2.0 : 1.0) / s->h, mode & 1 ? b->bb : b->tt);
        if (mode == 0) {
            b->loop = cplx_scale(v.loop, -s->h);
            sums(face, v.phi, b->top);
        }
    }
    for (i = 0; i < n * n; i++) {
        cplx even = b->tt[i], odd = b->bb[i];
        b->tt[i] = b->bb[i] = cplx_add(even, odd);
        b->tb[i] = cplx_sub(even, odd);
    }
}

static void fill_other(state *w, const cav_slab *s, block *b)
{
    const cav_kernel *k = &w->m->kernel[s->kernel];
    const cav_opening *top = &w->m->opening[s->top], *bottom = s->bottom >= 0 ? &w->m->opening[s->bottom] : NULL;
    int na = top->cells, nb = bottom != NULL ? bottom->cells : 0, mode;
    cplx packed[2 * N * N + 2 * N];
    mode_form f;
    mode_at va, vb;

    series(w, s, k, packed);
    unpack_triangle(packed, na, b->tt);
    if (nb > 0) {
        unpack_triangle(packed + na * (na + 1) / 2, nb, b->bb);
        memcpy(b->tb, packed + na * (na + 1) / 2 + nb * (nb + 1) / 2, (size_t)(na * nb) * sizeof b->tb[0]);
    }
    for (mode = 0; mode < k->first; mode++) {
        double weight = (mode ? 2.0 : 1.0) / s->h;
        make_form(w, s, mode, &f);
        mode_on(w, &f, s, top, mode, &va);
        add_own(&va, top, weight, b->tt);
        if (mode == 0) { b->loop = cplx_scale(va.loop, -s->h); sums(top, va.phi, b->top); }
        if (nb == 0) continue;
        mode_on(w, &f, s, bottom, mode, &vb);
        add_own(&vb, bottom, weight, b->bb);
        add_cross(&va, top, &vb, bottom, mode & 1 ? -weight : weight, b->tb);
        if (mode == 0) sums(bottom, vb.phi, b->bottom);
    }
}

/*
** A trace leaves at a face: I_up = I_low + I_o on all annuli, its voltage is the sum of theirs. Going up, V = s.V_face +
** zeta I_o, I_face = Y V_face + s I_o:  s <- C A^-1 s,  zeta <- zeta - s.A^-1 s,  A = Y + B with the loop.
*/
typedef struct trace {
    int on;
    cplx s[N], zeta;
} trace;

static void trace_up(trace *t, const block *b, int split, cplx gamma, const cplx *z, const cplx *d, int na,
                     int nb)
{
    cplx next[N], sigma = cplx_of(0.0, 0.0);
    int i, p, wide = na + 2;

    for (p = 0; p < nb; p++) {
        t->zeta = cplx_fms(t->zeta, t->s[p], z[p * wide + na + 1]);
        if (split) sigma = cplx_fma(sigma, b->bottom[p], z[p * wide + na + 1]);
    }
    if (split) t->zeta = cplx_fma(t->zeta, gamma, cplx_mul(sigma, sigma));
    for (i = 0; i < na; i++) {
        next[i] = cplx_of(0.0, 0.0);
        for (p = 0; p < nb; p++) next[i] = cplx_fma(next[i], b->tb[i * nb + p], z[p * wide + na + 1]);
        if (split) next[i] = cplx_fma(next[i], cplx_mul(gamma, sigma), d[i]);
    }
    memcpy(t->s, next, (size_t)na * sizeof next[0]);
}

/*
** y, what hangs below the slab, becomes what hangs at its top. With mode 0's rank-one term -1/loop kept apart,
**
**     Y <- T - C M^-1 C' + gamma d d',  M = Y + B,  d = top - C M^-1 bottom,  1/gamma = loop + bottom' M^-1 bottom
*/
static int step(state *w, const cav_slab *s, cplx *y, trace *t)
{
    int same = w->m->kernel[s->kernel].same, na = w->m->opening[s->top].cells, wide = na + 2;
    int nb = s->bottom >= 0 ? w->m->opening[s->bottom].cells : 0, split, i, j, p, slot;
    cplx tt[N * N], bb[N * N], tb[N * N], top[N], bottom[N], m[N * N], z[N * (N + 2)], d[N], gamma;
    block b = { tt, bb, tb, top, bottom, { 0.0, 0.0 } };

    if (same && na <= SMALL) {
        for (slot = 0; slot < w->blocks && slot < BLOCKS; slot++) if (w->kept[slot].kernel == s->kernel) break;
        if (slot == w->blocks || slot == BLOCKS) {
            kept_block *k = &w->kept[slot = w->blocks++ % BLOCKS];
            b.tt = k->tt; b.bb = k->bb; b.tb = k->tb; b.top = b.bottom = k->top;
            fill_same(w, s, &b);
            k->loop = b.loop;
            k->kernel = s->kernel;
        } else {
            kept_block *k = &w->kept[slot];
            b.tt = k->tt; b.bb = k->bb; b.tb = k->tb; b.top = b.bottom = k->top; b.loop = k->loop;
        }
    } else if (same) {
        b.bottom = top;
        fill_same(w, s, &b);
    } else {
        fill_other(w, s, &b);
    }
    if (nb == 0) {
        split = b.loop.re != 0.0 || b.loop.im != 0.0;
        gamma = split ? cplx_inv(b.loop) : b.loop;
        for (i = 0; i < na * na; i++) y[i] = split ? cplx_fma(b.tt[i], gamma, cplx_mul(b.top[i / na], b.top[i % na])) : b.tt[i];
        return 0;
    }
    split = b.loop.re != 0.0 || b.loop.im != 0.0;
    for (i = 0; i < nb * nb; i++) m[i] = cplx_add(b.bb[i], y[i]);
    for (i = 0; i < nb; i++) {
        for (j = 0; j < na; j++) z[i * wide + j] = b.tb[j * nb + i];
        z[i * wide + na] = split ? b.bottom[i] : cplx_of(0.0, 0.0);
        z[i * wide + na + 1] = t->on ? t->s[i] : cplx_of(0.0, 0.0);
    }
    if (lstub__zsolve(m, nb, nb, z, t->on ? wide : split ? na + 1 : na, wide) != 0) return -1;
    gamma = b.loop;
    if (split) {
        for (p = 0; p < nb; p++) gamma = cplx_fma(gamma, b.bottom[p], z[p * wide + na]);
        gamma = cplx_inv(gamma);
        for (i = 0; i < na; i++) {
            d[i] = b.top[i];
            for (p = 0; p < nb; p++) d[i] = cplx_fms(d[i], b.tb[i * nb + p], z[p * wide + na]);
        }
    }
    if (t->on) trace_up(t, &b, split, gamma, z, d, na, nb);
    for (i = 0; i < na; i++) {
        cplx g = split ? cplx_mul(gamma, d[i]) : gamma;
        for (j = 0; j <= i; j++) {
            cplx sum = split ? cplx_fma(b.tt[i * na + j], g, d[j]) : b.tt[i * na + j];
            for (p = 0; p < nb; p++) sum = cplx_fms(sum, b.tb[i * nb + p], z[p * wide + j]);
            y[i * na + j] = y[j * na + i] = sum;
        }
    }
    return 0;
}

static void half_space(const state *w, cplx *y)
{
    const lstub__cavity *m = w->m;
    int n = m->opening[m->half_opening].cells, i;
    cplx eps = w->eps[m->half_medium], k2 = cplx_scale(eps, w->k0 * w->k0), k4 = cplx_mul(k2, k2), k3;
    const double *h = m->half;

    k3 = cplx_mul(k2, cplx_sqrt(k2));
    k3 = cplx_of(k3.im, -k3.re);                                  /* -j k^3 */
    for (i = 0; i < n * n; i++) {
        cplx t = cplx_of(h[i] + k2.re * h[n * n + i] + k4.re * h[2 * n * n + i] + k3.re * h[3 * n * n + i],
                               k2.im * h[n * n + i] + k4.im * h[2 * n * n + i] + k3.im * h[3 * n * n + i]);
        y[i] = cplx_mul(eps, t);
    }
}

double lstub__cavity_limit(const lstub__cavity *m, const cplx *eps)
{
    double limit = INFINITY;
    int i;

    for (i = 0; i < m->slabs; i++) {
        double f = LSTUB_C0 / (2.0 * LSTUB_PI) * sqrt(m->kernel[m->slab[i].kernel].u_max / eps[m->slab[i].medium].re);
        if (f < limit) limit = f;
    }
    return limit;
}

void lstub__cavity_ports(const lstub__cavity *m, double freq, const cplx *eps, cplx out[3])
{
    state w;
    trace tr;
    cplx y[N * N], z, z0, er, t, e, one = cplx_of(1.0, 0.0), unit;
    double omega = 2.0 * LSTUB_PI * freq;
    int i, k;

    w.m = m;
    w.eps = eps;
    w.k0 = omega / LSTUB_C0;
    w.stored = w.singles = w.blocks = 0;
    tr.on = 0;
    tr.zeta = cplx_of(0.0, 0.0);
    out[0] = out[1] = out[2] = cplx_of(NAN, NAN);
    for (i = 0; i < m->media; i++) {
        cplx r = cplx_sqrt(eps[i]);
        w.kappa[i] = cplx_of(-w.k0 * r.im, w.k0 * r.re);          /* j k0 sqrt(eps) */
        w.ring_known[i] = 0;
    }
    if (m->half_opening >= 0) half_space(&w, y);
    for (i = m->slabs - 1; i >= 0; i--) {
        if (m->slab[i].tap) {
            tr.on = 1;
            for (k = 0; k < m->opening[m->slab[i].bottom].cells; k++) tr.s[k] = one;
        }
        if (step(&w, &m->slab[i], y, &tr) != 0) return;
    }
    /* y[0]: admittance of the TEM wave a length of line above z = 0; go back along it */
    unit = cplx_of(0.0, 1.0 / (-2.0 * LSTUB_PI * omega * LSTUB_EPS0));
    z = cplx_mul(cplx_inv(y[0]), unit);
    er = cplx_scale(eps[m->port_medium], m->ratio[m->port_medium]);
    z0 = cplx_scale(cplx_inv(cplx_sqrt(er)), m->port_log * LSTUB_MU0 * LSTUB_C0 / (2.0 * LSTUB_PI));
    e = cplx_scale(cplx_sqrt(er), 2.0 * w.k0 * m->feed_length);
    e = cplx_exp(cplx_of(-e.im, e.re));                        /* e^(2jkl); j tan = (e - 1)/(e + 1) */
    t = cplx_div(cplx_sub(e, one), cplx_add(e, one));
    out[0] = cplx_mul(z0, cplx_div(cplx_fms(z, z0, t), cplx_fms(z0, z, t)));
    if (!tr.on) return;
    /* current at z = 0 per ampere at the top: cos kl - j Z sin kl/Z0 = cos kl (1 - t Z/Z0) */
    e = cplx_scale(cplx_sqrt(er), w.k0 * m->feed_length);
    e = cplx_exp(cplx_of(-e.im, e.re));
    e = cplx_scale(cplx_add(e, cplx_inv(e)), 0.5);
    e = cplx_mul(e, cplx_fms(one, t, cplx_div(z, z0)));
    out[1] = cplx_div(cplx_mul(tr.s[0], z), e);
    /* the trace's own: V = s V1 + zeta I_o, at the current that leaves z = 0 open: V1 from -s I_o into Y and the line */
    e = cplx_div(cplx_mul(z0, one), t);                       /* open line seen from the top: -Z0/t */
    e = cplx_inv(cplx_sub(cplx_inv(z), cplx_inv(e)));
    out[2] = cplx_sub(cplx_mul(cplx_mul(tr.s[0], tr.s[0]), e), cplx_mul(tr.zeta, unit));
}

cplx lstub__cavity_zin(const lstub__cavity *m, double freq, const cplx *eps)
{
    cplx z[3];

    lstub__cavity_ports(m, freq, eps, z);
    return z[0];
}
