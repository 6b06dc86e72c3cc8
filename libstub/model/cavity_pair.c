/*
** A slab of one barrel, with the axial flux, or of two barrels side by side.
**
** Loss in metal: mode 0's loops are inductances jw mu0 h/(2 pi rho), in series with the surface impedance of the barrel, Zs h/(2 pi a),
** and with that of the planes, over which its current spreads as its flux does: Zs/(w mu0 h) of the loop's magnitude for each.
**
** Two barrels: each has its own waves as if it were alone (Q = 0), and mode 0 ties them. A barrel's wave K0 comes back to barrel q
** as Gamma_qp I0. With T = I0/K0 of each barrel that passes (0 where it has ended) and G = Gamma (1 + T Gamma)^-1 the radial
** admittances become R = diag(kappa a K1/K0) - G_qp/(K0_q K0_p), and mode 0's terms are -R/(h k0^2) between the phi of both. Where
** a barrel has ended its phi is (I0 - 1)/kappa^2, kappa^2 stands for 1/K0 and there is no own term; where a drilled hole is left, it
** scatters as a rod: phi is its field, T its own, kappa stands for 1/K0.
*/
#include "model/cavity_cascade.h"

static void point(block *b, cplx *own, cplx *ends)
{
    b->tt = own;
    b->bb = own + CAV_CELLS * CAV_CELLS;
    b->tb = own + 2 * CAV_CELLS * CAV_CELLS;
    b->top = ends;
    b->bottom = ends + CAV_CELLS;
    b->loop = cplx_of(0.0, 0.0);
}

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

static void clear(cav_step *c, cav_room *room, int na, int nb)
{
    int i, q;

    c->na = na;
    c->nb = nb;
    c->tt = room->tt;
    c->bb = room->bb;
    c->tb = room->tb;
    for (i = 0; i < na * na; i++) c->tt[i] = cplx_of(0.0, 0.0);
    for (i = 0; i < nb * nb; i++) c->bb[i] = cplx_of(0.0, 0.0);
    for (i = 0; i < na * nb; i++) c->tb[i] = cplx_of(0.0, 0.0);
    for (q = 0; q < 2; q++) {
        c->top[q] = room->column[2 * q];
        c->bottom[q] = room->column[2 * q + 1];
        for (i = 0; i < na; i++) c->top[q][i] = cplx_of(0.0, 0.0);
        for (i = 0; i < nb; i++) c->bottom[q][i] = cplx_of(0.0, 0.0);
    }
}

/* ---- two barrels -------------------------------------------------------------------------------- */

typedef struct two {                /* mode 0 of both, at their own cells */
    int  na[2], nb[2], ra[2], rb[2], present[2];
    cplx *top[2], *bottom[2], r[4];
} two;

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

static void pair_step(state *w, int slab, cav_room *room, cav_step *c)
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
        point(&b[i], room->own[i], room->ends[i]);
        cav_block(w, s[i], &b[i]);
        if (b[i].top != room->ends[i]) {        /* kept, and the keeper may be overwritten by the other's */
            block kept = b[i];
            point(&b[i], room->own[i], room->ends[i]);
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
    clear(c, room, na, nb);
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

/* ---- one barrel --------------------------------------------------------------------------------- */

/* The flux passes a slab as a line does. */
static void with_flux(const cav_slab *s, const cav_w *flux, cav_room *room, cav_step *c)
{
    cav_step in = *c;
    int na = in.na + 1, nb = in.nb + 1, i, j;
    double e = exp(-flux->gamma * s->h), f = 1.0 / (1.0 - e * e);

    clear(c, room, na, nb);
    for (i = 0; i < in.na; i++) {
        for (j = 0; j < in.na; j++) c->tt[i * na + j] = in.tt[i * in.na + j];
        for (j = 0; j < in.nb; j++) c->tb[i * nb + j] = in.tb[i * in.nb + j];
    }
    for (i = 0; i < in.nb; i++) for (j = 0; j < in.nb; j++) c->bb[i * nb + j] = in.bb[i * in.nb + j];
    c->tt[na * na - 1] = c->bb[nb * nb - 1] = cplx_scale(flux->y, (1.0 + e * e) * f);
    c->tb[na * nb - 1] = cplx_scale(flux->y, 2.0 * e * f);
    if (in.loops + in.pending > 0) {
        for (i = 0; i < in.na; i++) c->top[0][i] = in.top[0][i];
        for (i = 0; i < in.nb; i++) c->bottom[0][i] = in.bottom[0][i];
    }
}

/* What planes of surface impedance z add to a loop: j z |loop|/(k0 eta0 h), a resistance whether the loop is inductive or, past a
** resonance of its walls, not. */
static cplx of_planes(cplx z, cplx loop, double k0, double h)
{
    return cplx_scale(cplx_of(-z.im, z.re), cplx_abs(loop) / (k0 * LSTUB_ETA0 * h));
}

/* Loops of a slab with the loss of its metal; r_in: of what carries the current. */
void cav_add_metal(const state *w, const cav_slab *s, cplx *loop, int n, int stride)
{
    const cplx *z = w->surface;
    cplx planes = cplx_of(0.0, 0.0), wall;
    int i;

    if (z == NULL || n == 0 || s->r_in <= 0.0) return;
    if (s->metal_top >= 0) planes = cplx_add(planes, z[s->metal_top]);
    if (s->metal_bottom >= 0) planes = cplx_add(planes, z[s->metal_bottom]);
    wall = cplx_scale(z[0], s->h / s->r_in);
    if (s->metal_wall >= 0) wall = cplx_add(wall, cplx_scale(z[s->metal_wall], s->h / s->r_out));
    wall = cplx_scale(cplx_of(-wall.im, wall.re), w->k0 / LSTUB_ETA0);         /* jw eps0 Zs h/a */
    if (n == 2 && loop[0].re < 0.0 && loop[stride + 1].re < 0.0 && loop[1].re * loop[1].re < loop[0].re * loop[stride + 1].re) {  /* what two share */
        cplx shared = cplx_scale(cplx_of(planes.im, -planes.re), loop[1].re / (w->k0 * LSTUB_ETA0 * s->h));
        loop[1] = cplx_add(loop[1], shared);
        loop[stride] = cplx_add(loop[stride], shared);
    }
    for (i = 0; i < n; i++) {
        cplx *to = &loop[i * stride + i];
        *to = cplx_add(cplx_add(*to, of_planes(planes, *to, w->k0, s->h)), wall);
    }
}

void cav_step_make(state *w, int slab, const cav_w *flux, cav_room *room, cav_step *c)
{
    const lstub__cavity *m = w->m;
    const cav_slab *s = &m->slab[slab];
    block b;

    if (m->barrels > 1) {
        pair_step(w, slab, room, c);
        if (slab >= m->feed) cav_add_metal(w, s->r_in > 0.0 ? s : &m->slab[m->slabs + slab], c->loop, c->loops, c->loops);
        return;
    }
    point(&b, room->own[0], room->ends[0]);
    cav_block(w, s, &b);
    c->na = m->opening[s->top].cells;
    c->nb = s->bottom >= 0 ? m->opening[s->bottom].cells : 0;
    c->tt = b.tt;
    c->bb = b.bb;
    c->tb = b.tb;
    c->top[0] = b.top;
    c->bottom[0] = b.bottom;
    c->loop[0] = b.loop;
    c->pending = cav_shared(w, s);
    c->loops = !c->pending && (b.loop.re != 0.0 || b.loop.im != 0.0);
    if (slab >= m->feed) cav_add_metal(w, s, c->loop, c->loops, 1);
    if (flux->on && flux->started) with_flux(s, flux, room, c);
}
