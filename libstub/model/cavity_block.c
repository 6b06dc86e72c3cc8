/*
** A slab between its openings. Admittances are in units of 2 pi jw eps0; a slab ties the currents of its faces, downwards, to
** their voltages,
**
**     I_top = T V_top - C V_bottom,   I_bottom = C' V_top - B V_bottom.
**
** Mode 0 contains the inductance of the slab: a huge rank-one term at low frequency, which is carried apart (`loop`) so that
** nothing cancels.
*/
#include "model/cavity_state.h"

/* ---- a mode between two faces ------------------------------------------------------------------- */

void cav_sums(const cav_opening *o, const cplx *v, cplx *out)
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

    cav_sums(o, v->phi, alpha);
    cav_sums(o, v->psi, beta);
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

    cav_sums(a, va->phi, alpha_a);
    cav_sums(a, va->psi, beta_a);
    cav_sums(b, vb->phi, alpha_b);
    cav_sums(b, vb->psi, beta_b);
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

/* to += f c for real c, parts apart: loops that a compiler can make two or four of. */
static void add_term(double *restrict re, double *restrict im, cplx f, const double *restrict c, int n)
{
    int e;

    for (e = 0; e < n; e++) {
        re[e] += f.re * c[e];
        im[e] += f.im * c[e];
    }
}

static void series(const state *w, const cav_slab *s, const cav_kernel *k, cplx *out)
{
    cplx eps = w->eps[s->medium], u = cplx_scale(eps, w->k0 * w->k0), t, t0 = cplx_of(1.0, 0.0), t1, dq, factor;
    const double *c = k->coef, *cq = k->coef_q;
    double re[2 * N * N + 2 * N], im[2 * N * N + 2 * N];
    int n = k->entries, d, e;

    t = cplx_of(2.0 * u.re / k->u_max - 1.0, 2.0 * u.im / k->u_max);
    t1 = t;
    dq = cplx_of(0.0, 0.0);
    if (cq != NULL) { dq = cplx_div(w->eps[s->fill], eps); dq.re -= k->q; }
    for (e = 0; e < n; e++) { re[e] = c[e]; im[e] = 0.0; }
    if (cq != NULL) add_term(re, im, dq, cq, n);
    for (d = 1; d <= k->degree; d++) {
        cplx next;
        c += n;
        add_term(re, im, t1, c, n);
        if (cq != NULL) add_term(re, im, cplx_mul(dq, t1), cq += n, n);
        next = cplx_fms(cplx_neg(t0), cplx_of(-2.0, 0.0), cplx_mul(t, t1));
        t0 = t1;
        t1 = next;
    }
    factor = cplx_scale(eps, 1.0 / s->h);
    for (e = 0; e < n; e++) out[e] = cplx_mul(cplx_of(re[e], im[e]), factor);
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
        cav_make_form(w, s, mode, &f);
        cav_mode_on(w, &f, s, face, mode, &v);
        add_own(&v, face, (mode ? 2.0 : 1.0) / s->h, mode & 1 ? b->bb : b->tt);
        if (mode == 0) {
            b->loop = cplx_scale(v.loop, -s->h);
            cav_sums(face, v.phi, b->top);
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
        cav_make_form(w, s, mode, &f);
        cav_mode_on(w, &f, s, top, mode, &va);
        add_own(&va, top, weight, b->tt);
        if (mode == 0) { b->loop = cplx_scale(va.loop, -s->h); cav_sums(top, va.phi, b->top); }
        if (nb == 0) continue;
        cav_mode_on(w, &f, s, bottom, mode, &vb);
        add_own(&vb, bottom, weight, b->bb);
        add_cross(&va, top, &vb, bottom, mode & 1 ? -weight : weight, b->tb);
        if (mode == 0) cav_sums(bottom, vb.phi, b->bottom);
    }
}

void cav_half_admittance(const state *w, const double *h, int n, cplx *y)
{
    cplx eps = w->eps[w->m->half_medium], k2 = cplx_scale(eps, w->k0 * w->k0), k4 = cplx_mul(k2, k2), k3;
    int i;

    k3 = cplx_mul(k2, cplx_sqrt(k2));
    k3 = cplx_of(k3.im, -k3.re);                                  /* -j k^3 */
    for (i = 0; i < n * n; i++) {
        cplx t = cplx_of(h[i] + k2.re * h[n * n + i] + k4.re * h[2 * n * n + i] + k3.re * h[3 * n * n + i],
                               k2.im * h[n * n + i] + k4.im * h[2 * n * n + i] + k3.im * h[3 * n * n + i]);
        y[i] = cplx_mul(eps, t);
    }
}

void cav_block(state *w, const cav_slab *s, block *b)
{
    const cav_kernel *k = &w->m->kernel[s->kernel];
    int slot, key = cav_shared(w, s) ? -2 : s->answer;

    if (!k->same) { fill_other(w, s, b); return; }
    if (w->m->opening[s->top].cells > SMALL) { b->bottom = b->top; fill_same(w, s, b); return; }
    for (slot = 0; slot < w->blocks && slot < BLOCKS; slot++) if (w->kept[slot].kernel == s->kernel && w->kept[slot].answer == key) break;
    if (slot == w->blocks || slot == BLOCKS) {
        kept_block *kept = &w->kept[slot = w->blocks++ % BLOCKS];
        b->tt = kept->tt; b->bb = kept->bb; b->tb = kept->tb; b->top = b->bottom = kept->top;
        fill_same(w, s, b);
        kept->loop = b->loop;
        kept->kernel = s->kernel;
        kept->answer = key;
    } else {
        kept_block *kept = &w->kept[slot];
        b->tt = kept->tt; b->bb = kept->bb; b->tb = kept->tb; b->top = b->bottom = kept->top; b->loop = kept->loop;
    }
}
