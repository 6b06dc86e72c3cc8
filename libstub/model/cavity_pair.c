/*
** A slab of two barrels side by side.
**
** Each has its own waves as if it were alone (Q = 0), and mode 0 ties them. A barrel's wave K0 comes back to barrel q
** as Gamma_qp I0. With T = I0/K0 of each barrel that passes (0 where it has ended) and G = Gamma (1 + T Gamma)^-1 the radial
** admittances become R = diag(kappa a K1/K0) - G_qp/(K0_q K0_p), and mode 0's terms are -R/(h k0^2) between the phi of both. Where
** a barrel has ended its phi is (I0 - 1)/kappa^2, kappa^2 stands for 1/K0 and there is no own term; where a drilled hole is left, it
** scatters as a rod: phi is its field, T its own, kappa stands for 1/K0.
*/
#include "model/cavity_cascade.h"

/* Puts a barrel's block where its cells lie among all. */
static void place(const block *b, int na, int nb, int ra, int rb, cav_step *c)
{
    int i, j;

    for (i = 0; i < na; i++) {
        for (j = 0; j < na; j++) c->tt[(ra + i) * c->na + ra + j] = b->tt[i * na + j];
        for (j = 0; j < nb; j++) c->tb[(ra + i) * c->nb + rb + j] = b->tb[i * nb + j];
    }
    for (i = 0; i < nb; i++) for (j = 0; j < nb; j++) c->bb[(rb + i) * c->nb + rb + j] = b->bb[i * nb + j];
}

typedef struct two {                /* mode 0 of both, at their own cells */
    int  na[2], nb[2], ra[2], rb[2], present[2];
    cplx *top[2], *bottom[2];
} two;

static void admittances(state *w, const cav_slab *const *each, const int *present, cplx *r)
{
    const cav_slab *s = each[0];
    const cav_echo *echo = cav_echo_of(w, s);
    cplx t[2], c[2], own[2], m[4], det, g[4];
    int i;

    for (i = 0; i < 2; i++) cav_wave_of(w, each[i], &t[i], &c[i], &own[i]);
    for (i = 0; i < 4; i++) {           /* 1 + T Gamma */
        m[i] = cplx_mul(t[i / 2], echo->gamma[i]);
        if (i == 0 || i == 3) m[i].re += 1.0;
    }
    det = cplx_inv(cplx_fms(cplx_mul(m[0], m[3]), m[1], m[2]));
    g[0] = cplx_mul(det, cplx_fms(cplx_mul(echo->gamma[0], m[3]), echo->gamma[1], m[2]));
    g[1] = cplx_mul(det, cplx_fms(cplx_mul(echo->gamma[1], m[0]), echo->gamma[0], m[1]));
    g[2] = cplx_mul(det, cplx_fms(cplx_mul(echo->gamma[2], m[3]), echo->gamma[3], m[2]));
    g[3] = cplx_mul(det, cplx_fms(cplx_mul(echo->gamma[3], m[0]), echo->gamma[2], m[1]));
    for (i = 0; i < 4; i++) r[i] = cplx_neg(cplx_mul(g[i], cplx_mul(c[i / 2], c[i % 2])));
    for (i = 0; i < 2; i++) if (present[i]) r[3 * i] = cplx_add(r[3 * i], own[i]);
}

/* Adds g (top_q, -bottom_q)(top_p, -bottom_p)' to the matrices. */
static void add_term(cav_step *c, const two *v, int q, int p, cplx g)
{
    int i, j;

    for (i = 0; i < v->na[q]; i++) {
        cplx x = cplx_mul(g, v->top[q][i]);
        for (j = 0; j < v->na[p]; j++) {
            cplx *to = &c->tt[(v->ra[q] + i) * c->na + v->ra[p] + j];
            *to = cplx_fma(*to, x, v->top[p][j]);
        }
        for (j = 0; j < v->nb[p]; j++) {
            cplx *to = &c->tb[(v->ra[q] + i) * c->nb + v->rb[p] + j];
            *to = cplx_fma(*to, x, v->bottom[p][j]);
        }
    }
    for (i = 0; i < v->nb[q]; i++) {
        cplx x = cplx_mul(g, v->bottom[q][i]);
        for (j = 0; j < v->nb[p]; j++) {
            cplx *to = &c->bb[(v->rb[q] + i) * c->nb + v->rb[p] + j];
            *to = cplx_fma(*to, x, v->bottom[p][j]);
        }
    }
}

static void add_column(cav_step *c, const two *v, int loop, int q, cplx factor)
{
    int i;

    for (i = 0; i < v->na[q]; i++) c->top[loop][v->ra[q] + i] = cplx_mul(factor, v->top[q][i]);
    for (i = 0; i < v->nb[q]; i++) c->bottom[loop][v->rb[q] + i] = cplx_mul(factor, v->bottom[q][i]);
}

/* Mode 0 of both in a slab whose waves they share. */
static void tie(state *w, const cav_slab *const *each, const two *v, cav_step *c)
{
    const cav_slab *s = each[0];
    const cplx one = cplx_of(1.0, 0.0);
    cplx r[4], ratio;
    int i, q;

    admittances(w, each, v->present, r);
    for (i = 0; i < 4; i++) r[i] = cplx_scale(r[i], -1.0 / (s->h * w->k0 * w->k0));
    if (v->present[0] && v->present[1]) {
        c->loops = 2;
        add_column(c, v, 0, 0, one);
        add_column(c, v, 1, 1, one);
        cav_invert(r, 2, c->loop);
    } else if (v->present[0] || v->present[1]) {
        q = v->present[0] ? 0 : 1;
        ratio = cplx_div(r[1], r[3 * q]);
        c->loops = 1;
        add_column(c, v, 0, q, one);
        add_column(c, v, 0, 1 - q, ratio);
        c->loop[0] = cplx_inv(r[3 * q]);
        add_term(c, v, 1 - q, 1 - q, cplx_fms(r[3 - 3 * q], ratio, r[1]));
    } else {
        c->loops = 0;
        for (i = 0; i < 4; i++) add_term(c, v, i / 2, i % 2, r[i]);
    }
}

void cav_pair_step(state *w, int slab, cav_room *room, cav_step *c)
{
    const lstub__cavity *m = w->m;
    const cav_slab *s[2];
    block b[2];
    two v;
    int i, na = 0, nb = 0;

    for (i = 0; i < 2; i++) {
        s[i] = &m->slab[i * m->slabs + slab];
        v.na[i] = m->opening[s[i]->top].cells;
        v.nb[i] = s[i]->bottom >= 0 ? m->opening[s[i]->bottom].cells : 0;
        v.ra[i] = na;
        v.rb[i] = nb;
        na += v.na[i];
        nb += v.nb[i];
        v.present[i] = s[i]->r_in > 0.0;
        cav_block_at(&b[i], room->own[i], room->ends[i]);
        cav_block(w, s[i], &b[i]);
        if (b[i].top != room->ends[i]) {        /* kept, and the keeper may be overwritten by the other's */
            block kept = b[i];
            cav_block_at(&b[i], room->own[i], room->ends[i]);
            memcpy(b[i].tt, kept.tt, (size_t)(v.na[i] * v.na[i]) * sizeof(cplx));
            memcpy(b[i].bb, kept.bb, (size_t)(v.nb[i] * v.nb[i]) * sizeof(cplx));
            memcpy(b[i].tb, kept.tb, (size_t)(v.na[i] * v.nb[i]) * sizeof(cplx));
            memcpy(b[i].top, kept.top, (size_t)v.na[i] * sizeof(cplx));
            memcpy(b[i].bottom, kept.bottom, (size_t)v.nb[i] * sizeof(cplx));
            b[i].loop = kept.loop;
        }
        v.top[i] = b[i].top;
        v.bottom[i] = b[i].bottom;
    }
    cav_step_clear(c, room, na, nb);
    c->pending = 0;
    for (i = 0; i < 2; i++) place(&b[i], v.na[i], v.nb[i], v.ra[i], v.rb[i], c);
    if (cav_shared(w, s[0])) {
        c->loops = 0;
        c->pending = 2;
        for (i = 0; i < 2; i++) add_column(c, &v, i, i, cplx_of(1.0, 0.0));
        return;
    }
    if (s[0]->outer == LSTUB__CAV_RING) {
        tie(w, s, &v, c);
        return;
    }
    c->loops = 0;
    for (i = 0; i < 2; i++) {
        if (b[i].loop.re == 0.0 && b[i].loop.im == 0.0) continue;
        add_column(c, &v, c->loops, i, cplx_of(1.0, 0.0));
        c->loop[0] = c->loops == 0 ? b[i].loop : c->loop[0];
        if (c->loops == 1) {
            c->loop[3] = b[i].loop;
            c->loop[1] = c->loop[2] = cplx_of(0.0, 0.0);
        }
        c->loops++;
    }
}
