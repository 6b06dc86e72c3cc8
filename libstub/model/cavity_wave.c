/*
** The radial waves of one mode in a slab, at the rims of its openings. Mode 0, and what there is of modes below the cut-off
** series, is computed at every frequency; Bessel functions are kept for as long as that frequency lasts.
*/
#include "model/cavity_state.h"

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

const cav_echo *cav_echo_of(state *w, const cav_slab *s)
{
    const cav_answer *a = &w->m->answer[s->answer];

    if (!w->echo_known[s->answer]) {
        cav_ring(&w->m->returns, a->vias, a->barrels, w->m->radius, w->kappa[a->medium], w->m->barrels > 1, &w->echo[s->answer]);
        w->echo_known[s->answer] = 1;
    }
    return &w->echo[s->answer];
}

static cplx reflection(state *w, const cav_slab *s, int mode, cplx kappa)
{
    if (mode == 0 && cav_shared(w, s)) return cplx_of(0.0, 0.0);
    if (s->outer == LSTUB__CAV_WALL) {
        cplx i, k;
        if (mode == 0) {
            const radius_store *r = at_radius(w, s->medium, s->r_out);
            return cplx_div(r->k0, r->i0);
        }
        lstub__bessel_zik0(cplx_scale(kappa, s->r_out), &i, &k);
        return cplx_div(k, i);
    }
    if (s->outer == LSTUB__CAV_RING && mode == 0 && w->m->barrels == 1) return cplx_neg(cav_echo_of(w, s)->gamma[0]);
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
static double reach_of(const lstub__cavity *m, const cav_slab *s, int shared)
{
    const cav_opening *a = &m->opening[s->top], *b = s->bottom >= 0 ? &m->opening[s->bottom] : a;
    double r = a->x[a->points - 1];

    if (b->x[b->points - 1] > r) r = b->x[b->points - 1];
    if (s->outer == LSTUB__CAV_WALL && !shared && s->r_out > r) r = s->r_out;
    return r * r;
}

/* Below this, 30 MHz, mode 0 around a hole, which divides by kappa^2, is taken from there. */
#define LEAST_K0 0.63

void cav_make_form(state *w, const cav_slab *s, int mode, mode_form *f)
{
    cplx d = cplx_of(1.0, 0.0), eps = w->eps[s->medium];
    double k0 = w->k0;

    f->hole = s->fill >= 0;
    f->small = mode == 0 && !f->hole && cplx_norm(w->kappa[s->medium]) * reach_of(w->m, s, cav_shared(w, s)) < (w->m->barrels > 1 || cav_shared(w, s) ? 144.0 : 30.0);    /* these are tied by this form alone */
    f->kappa = mode == 0 ? w->kappa[s->medium] : wave_number(eps, w->m->ratio[s->medium], k0, mode, s->h);
    f->q = reflection(w, s, mode, f->kappa);
    f->t = cplx_of(0.0, 0.0);
    if (f->hole) {
        cplx ef = w->eps[s->fill];
        if (mode == 0 && k0 < LEAST_K0) {       /* ln kappa goes into Q, all else is the static field to (kappa r)^2 */
            f->kappa = cplx_scale(f->kappa, LEAST_K0 / k0);
            f->q.re -= log(LEAST_K0 / k0);
            k0 = LEAST_K0;
        }
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

/*
** Of mode 0 in a slab as if alone: T, what stands for 1/K0, and kappa a K1/K0 (0 where no barrel passes); a: the barrel's radius
** or that of the pad on it.
*/
void cav_wave_of(state *w, const cav_slab *s, cplx *t, cplx *c, cplx *own)
{
    cplx k = w->kappa[s->medium], e = cplx_exp(cplx_scale(k, s->r_in));
    lstub__zik b;

    *t = *own = cplx_of(0.0, 0.0);
    *c = cplx_mul(k, k);
    if (s->r_in > 0.0) {
        lstub__bessel_zik(cplx_scale(k, s->r_in), &b);
        *t = cplx_mul(cplx_div(b.i0, b.k0), cplx_mul(e, e));
        *c = cplx_div(e, b.k0);
        *own = cplx_scale(cplx_mul(k, cplx_div(b.k1, b.k0)), s->r_in);
    } else if (s->fill >= 0) {
        mode_form f;
        cav_make_form(w, s, 0, &f);
        *t = f.t;
        *c = cplx_div(cplx_mul(k, k), f.kappa);
    }
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
static cplx admittance(const mode_form *f, const cav_slab *s, cplx k2, int shared)
{
    double a = s->r_in;
    cplx rho, t;

    if (s->outer == LSTUB__CAV_WALL && !shared) {
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
    v->loop = cplx_div(cplx_of(w->k0 * w->k0, 0.0), admittance(f, s, k2, cav_shared(w, s)));
    memcpy(v->phi, r->i, (size_t)o->points * sizeof *r->i);
    memcpy(v->psi, r->s, (size_t)o->points * sizeof *r->s);
    memcpy(v->lambda, r->l, (size_t)o->points * sizeof *r->l);
}

void cav_mode_on(state *w, const mode_form *f, const cav_slab *s, const cav_opening *o, int mode, mode_at *v)
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


void cav_state(state *w, const lstub__cavity *m, double k0, const cplx *eps, const cplx *surface)
{
    int i;

    w->m = m;
    w->eps = eps;
    w->surface = surface;
    w->k0 = k0;
    w->plain = 0;
    w->stored = w->singles = w->blocks = 0;
    for (i = 0; i < m->media; i++) {
        cplx r = cplx_sqrt(eps[i]);
        w->kappa[i] = cplx_of(-k0 * r.im, k0 * r.re);          /* j k0 sqrt(eps) */
    }
    for (i = 0; i < m->answers; i++) w->echo_known[i] = 0;
}
