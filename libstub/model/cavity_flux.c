/*
** The axial flux: at a plane the barrel's current drops by dI; copper carries the jump of the magnetic field, an opening cannot, so
** that a field H_z proportional to the transverse field at the barrel threads it. It is an inductance in series with the
** plane's capacitance C, and planes share it, for the field fades along the barrel as e^(-gamma z): a line with one
** unknown W a face,
**
**     y = h/(2 jw mu0 J tanh(gamma h/2)),   at a plane Y <- [[Y, -jw C 1], [-jw C 1', Y_W + jw C]].
**
** J is found with the return vias (cavity_ring.c); C is that of the opening as a whole, all openings at one voltage, at 1 GHz.
*/
#include "model/cavity_cascade.h"

#define NOTHING 1e-10       /* J over the opening's radius squared: a barrel whose surroundings are even has no transverse field */

static double decay(const lstub__cavity *m)
{
    const lstub__cav_returns *r = &m->returns;
    double big = r->opening + log(2.0) / LSTUB_PI * r->height;

    if (!r->slot) return 2.3 / big;
    return r->sign < 0.0 ? (2.03 - 0.8 * m->radius / big) / big : 2.1 / big;
}

/* Mean of J over the cavities that the barrel passes. */
static cplx mean_shape(state *w)
{
    const lstub__cavity *m = w->m;
    cplx j = cplx_of(0.0, 0.0);
    double h = 0.0;
    int i;

    for (i = m->feed; i < m->slabs; i++) {
        const cav_slab *s = &m->slab[i];
        if (s->outer != LSTUB__CAV_RING || s->r_in <= 0.0) continue;
        j = cplx_add(j, cplx_scale(cav_echo_of(w, s)->flux, s->h));
        h += s->h;
    }
    return h > 0.0 ? cplx_scale(j, 1.0 / h) : j;
}

void cav_flux_start(state *w, cav_w *flux)
{
    const lstub__cavity *m = w->m;
    double h = m->returns.height;
    cplx j;

    flux->on = m->returns.flux;
    flux->started = 0;
    flux->plane = m->planes;
    if (!flux->on) return;
    flux->gamma = decay(m);
    j = mean_shape(w);
    if (j.im > 0.0) j.im = 0.0;                 /* the fit turns its phase where the field radiates: a line that gave power */
    flux->y = cplx_div(cplx_of(-h / (4.0 * LSTUB_PI * w->k0 * w->k0 * tanh(0.5 * flux->gamma * h)), 0.0), j);
}

void cav_flux_plane(const state *w, cav_w *flux, const cav_slab *s, cav_load *l)
{
    const lstub__cavity *m = w->m;
    int n = l->n, wide, i, j;
    cplx y[CAV_WIDE * CAV_WIDE], c;

    if (!flux->started) {
        wide = n + 1;
        for (i = 0; i < wide; i++)
            for (j = 0; j < wide; j++) y[i * wide + j] = i < n && j < n ? l->y[i * n + j] : cplx_of(0.0, 0.0);
        y[wide * wide - 1] = flux->y;
        memcpy(l->y, y, (size_t)(wide * wide) * sizeof y[0]);
        for (i = 0; i < l->columns; i++) l->s[n * CAV_COLUMNS + i] = cplx_of(0.0, 0.0);
        l->n = wide;
        flux->started = 1;
    }
    n = l->n;
    if (flux->plane == m->planes) {             /* the lowest plane: the partner's end pad pulls at what hangs below */
        cplx pull = cplx_of(m->returns.pull / (2.0 * LSTUB_PI * LSTUB_EPS0), 0.0);
        for (i = 0; i < n - 1; i++) for (j = 0; j < n - 1; j++) l->y[i * n + j] = cplx_add(l->y[i * n + j], pull);
    }
    if (flux->plane == 0) return;
    c = cplx_scale(w->eps[s->medium], m->plane_c[--flux->plane] / (2.0 * LSTUB_PI * LSTUB_EPS0));
    for (i = 0; i < n - 1; i++) {
        l->y[i * n + n - 1] = cplx_sub(l->y[i * n + n - 1], c);
        l->y[(n - 1) * n + i] = cplx_sub(l->y[(n - 1) * n + i], c);
    }
    l->y[n * n - 1] = cplx_add(l->y[n * n - 1], c);
}

/* Beyond the uppermost plane the line goes on. */
void cav_flux_stop(cav_w *flux, cav_load *l)
{
    int n = l->n - 1, t = l->columns, i, j;
    cplx y[CAV_WIDE * CAV_WIDE], inverse, sw[CAV_COLUMNS];

    flux->on = 0;
    if (!flux->started) return;
    inverse = cplx_inv(cplx_add(l->y[(n + 1) * (n + 1) - 1], flux->y));
    for (i = 0; i < t; i++) sw[i] = l->s[n * CAV_COLUMNS + i];
    for (i = 0; i < n; i++) {
        cplx x = cplx_mul(inverse, l->y[i * (n + 1) + n]);
        for (j = 0; j < n; j++) y[i * n + j] = cplx_fms(l->y[i * (n + 1) + j], x, l->y[n * (n + 1) + j]);
        for (j = 0; j < t; j++) l->s[i * CAV_COLUMNS + j] = cplx_fms(l->s[i * CAV_COLUMNS + j], x, sw[j]);
    }
    for (i = 0; i < t; i++)
        for (j = 0; j < t; j++) l->zeta[i * CAV_COLUMNS + j] = cplx_fms(l->zeta[i * CAV_COLUMNS + j], cplx_mul(inverse, sw[i]), sw[j]);
    memcpy(l->y, y, (size_t)(n * n) * sizeof y[0]);
    l->n = n;
}

/* ---- once a geometry: the planes' capacitances --------------------------------------------------- */

typedef struct two_port {           /* between two faces, all of mode 0 in it */
    int  na, nb;
    cplx t[CAV_CELLS * CAV_CELLS], c[CAV_CELLS * CAV_CELLS], b[CAV_CELLS * CAV_CELLS];
} two_port;

typedef struct study {
    state    w;
    cav_load load;
    cav_room room;
    two_port chain, slab;
    cplx     below[CAV_CELLS * CAV_CELLS];      /* what the lowest plane so far sees below, all at one voltage */
} study;

static void whole(const cav_step *s, two_port *p)
{
    cplx g = s->loops > 0 ? cplx_inv(s->loop[0]) : cplx_of(0.0, 0.0);
    int i, j;

    p->na = s->na;
    p->nb = s->nb;
    for (i = 0; i < s->na; i++) {
        cplx x = s->loops > 0 ? cplx_mul(g, s->top[0][i]) : g;
        for (j = 0; j < s->na; j++) p->t[i * s->na + j] = s->loops > 0 ? cplx_fma(s->tt[i * s->na + j], x, s->top[0][j]) : s->tt[i * s->na + j];
        for (j = 0; j < s->nb; j++) p->c[i * s->nb + j] = s->loops > 0 ? cplx_fma(s->tb[i * s->nb + j], x, s->bottom[0][j]) : s->tb[i * s->nb + j];
    }
    for (i = 0; i < s->nb; i++) {
        cplx x = s->loops > 0 ? cplx_mul(g, s->bottom[0][i]) : g;
        for (j = 0; j < s->nb; j++) p->b[i * s->nb + j] = s->loops > 0 ? cplx_fma(s->bb[i * s->nb + j], x, s->bottom[0][j]) : s->bb[i * s->nb + j];
    }
}

/* Puts an upper two-port on top of a chain. */
static int stack(const two_port *u, two_port *l)
{
    int na = u->na, nm = u->nb, nb = l->nb, wide = na + nb, i, j, k;
    cplx m[CAV_CELLS * CAV_CELLS], x[2 * CAV_CELLS * CAV_CELLS], c[CAV_CELLS * CAV_CELLS];

    for (i = 0; i < nm * nm; i++) m[i] = cplx_add(l->t[i], u->b[i]);
    for (i = 0; i < nm; i++) {
        for (j = 0; j < na; j++) x[i * wide + j] = u->c[j * nm + i];
        for (j = 0; j < nb; j++) x[i * wide + na + j] = l->c[i * nb + j];
    }
    if (lstub__zsolve(m, nm, nm, x, wide, wide) != 0) return -1;
    for (i = 0; i < na; i++)
        for (j = 0; j < nb; j++) {
            c[i * nb + j] = cplx_of(0.0, 0.0);
            for (k = 0; k < nm; k++) c[i * nb + j] = cplx_fma(c[i * nb + j], u->c[i * nm + k], x[k * wide + na + j]);
        }
    for (i = 0; i < nb; i++)
        for (j = 0; j < nb; j++)
            for (k = 0; k < nm; k++) l->b[i * nb + j] = cplx_fms(l->b[i * nb + j], l->c[k * nb + i], x[k * wide + na + j]);
    for (i = 0; i < na; i++)
        for (j = 0; j < na; j++) {
            cplx sum = u->t[i * na + j];
            for (k = 0; k < nm; k++) sum = cplx_fms(sum, u->c[i * nm + k], x[k * wide + j]);
            l->t[i * na + j] = sum;
        }
    memcpy(l->c, c, (size_t)(na * nb) * sizeof c[0]);
    l->na = na;
    return 0;
}

/* Capacitance of an opening between what it sees below and above; 0 where that cannot be told. */
static double opening_c(const cplx *below, const two_port *above, int n)
{
    cplx b[CAV_CELLS * CAV_CELLS], v[CAV_CELLS], sum = cplx_of(0.0, 0.0);
    int i, j;

    if (above->nb != n || above->na != n) return 0.0;
    for (i = 0; i < n; i++) {
        v[i] = cplx_of(1.0, 0.0);
        for (j = 0; j < n; j++) b[i * n + j] = cplx_add(below[i * n + j], cplx_sub(above->b[i * n + j], above->c[j * n + i]));
    }
    if (lstub__zsolve(b, n, n, v, 1, 1) != 0) return 0.0;
    for (i = 0; i < n; i++) sum = cplx_add(sum, v[i]);
    return sum.re > 0.0 ? 2.0 * LSTUB_PI * LSTUB_EPS0 / sum.re : 0.0;
}

static int find_capacitances(lstub__cavity *m, const lstub__cav_medium *medium, study *s)
{
    cav_w none;
    cav_step c;
    double dk = 1.0;                            /* of the slab above the plane in hand: plane_c is per unit of it */
    int i, k, first = 1, n = 0;

    none.on = none.started = 0;
    m->planes = 0;
    s->load.n = s->load.traces = s->load.columns = 0;
    if (m->half_opening[0] >= 0) {
        s->load.n = m->opening[m->half_opening[0]].cells;
        cav_half_admittance(&s->w, m->half[0], s->load.n, s->load.y);
    }
    for (i = m->slabs - 1; i >= m->feed; i--) {
        const cav_slab *slab = &m->slab[i];
        int here = slab->plane && slab->r_in > 0.0;
        if (m->lid_top && i == 0) break;
        if (here) {                             /* the chain below ends at this plane */
            if (first) {
                n = s->load.n;
                memcpy(s->below, s->load.y, (size_t)(n * n) * sizeof s->below[0]);
            } else {
                m->plane_c[m->planes++] = opening_c(s->below, &s->chain, n) / dk;
                n = s->chain.na;
                if (s->chain.nb == n)
                    for (k = 0; k < n * n; k++) s->below[k] = cplx_sub(s->chain.t[k], s->chain.c[k]);
                else
                    memset(s->below, 0, sizeof s->below);
            }
        }
        cav_step_make(&s->w, i, &none, &s->room, &c);
        if (first && !here) {
            if (cav_step_up(&s->load, &c) != 0) return -1;
            continue;
        }
        if (here) dk = medium[slab->medium].dk;
        whole(&c, here ? &s->chain : &s->slab);
        if (!here && stack(&s->slab, &s->chain) != 0) return -1;
        first = 0;
    }
    if (!first) {
        m->plane_c[m->planes++] = opening_c(s->below, &s->chain, n) / dk;
    }
    for (i = 0; i < m->planes / 2; i++) {       /* found upwards, kept downwards */
        double t = m->plane_c[i];
        m->plane_c[i] = m->plane_c[m->planes - 1 - i];
        m->plane_c[m->planes - 1 - i] = t;
    }
    return 0;
}

int cav_flux_prepare(lstub__cavity *m, const lstub__cav_medium *medium, void *scratch)
{
    study *s = scratch;
    cplx eps[LSTUB__CAV_MEDIA];
    int i, failed;

    m->planes = 0;
    if (!m->returns.flux) return 0;
    for (i = 0; i < m->media; i++) eps[i] = cplx_of(medium[i].dk, 0.0);
    cav_state(&s->w, m, 2.0 * LSTUB_PI * 1e9 / LSTUB_C0, eps, NULL);
    s->w.plain = 1;
    if (!(cplx_norm(mean_shape(&s->w)) > NOTHING * NOTHING * pow(m->returns.opening, 4.0))) {
        m->returns.flux = 0;
        return 0;
    }
    failed = find_capacitances(m, medium, s);
    return failed;
}

size_t cav_flux_scratch(void) { return sizeof(study); }
