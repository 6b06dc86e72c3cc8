/*
** A slab as a step of the cascade: its block, with the axial flux, with the loss of its metal.
**
** Loss in metal: mode 0's loops are inductances jw mu0 h/(2 pi rho), in series with the surface impedance of the barrel, Zs h/(2 pi a),
** and with that of the planes, over which its current spreads as its flux does: Zs/(w mu0 h) of the loop's magnitude for each.
*/
#include "model/cavity_cascade.h"

void cav_block_at(block *b, cplx *own, cplx *ends)
{
    b->tt = own;
    b->bb = own + CAV_CELLS * CAV_CELLS;
    b->tb = own + 2 * CAV_CELLS * CAV_CELLS;
    b->top = ends;
    b->bottom = ends + CAV_CELLS;
    b->loop = cplx_of(0.0, 0.0);
}

void cav_step_clear(cav_step *c, cav_room *room, int na, int nb)
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

/* The flux passes a slab as a line does. */
static void with_flux(const cav_slab *s, const cav_w *flux, cav_room *room, cav_step *c)
{
    cav_step in = *c;
    int na = in.na + 1, nb = in.nb + 1, i, j;
    double e = exp(-flux->gamma * s->h), f = 1.0 / (1.0 - e * e);

    cav_step_clear(c, room, na, nb);
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
        cav_pair_step(w, slab, room, c);
        if (slab >= m->feed) cav_add_metal(w, s->r_in > 0.0 ? s : &m->slab[m->slabs + slab], c->loop, c->loops, c->loops);
        return;
    }
    cav_block_at(&b, room->own[0], room->ends[0]);
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
