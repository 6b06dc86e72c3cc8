/*
** A space between two planes where traces leave. Its slabs are cut apart at the traces' faces only as far out as `reach`: a trace is
** no sheet of copper, beyond it the space is one. Mode 0 of slab q, A_q I0 - B_q K0 outside, then has a common part, weighted by height,
** that sees the return vias (or walls, or nothing) of the whole space, A = -Gamma_c B, and differences, which end there:
**
**     A_q = -sum_p Gamma_qp B_p,  Gamma_qp = (h_p/H) Gamma_c + (delta_qp - h_p/H) Gamma_d,  Gamma_d = -K0/I0 (kappa reach),
**
** the delta's Gamma_d of each slab's own dielectric.
**
** H is infinite beyond the outermost plane. With T and G as in cavity_pair.c the currents of the waves are j = K e, e their
** voltages, K = -(R_qp/h_p)/k0^2. While the slabs are stepped over the waves are pending columns; here they are closed:
** e = s.V + zeta j + zeta_t I, loss in metal in series, so that (1 + K (loss - zeta)) j = K (s.V + zeta_t I).
*/
#include "model/cavity_cascade.h"

#define MOST CAV_PENDING

typedef struct wave { cplx t, c, own, metal, ended; double h; int barrel; } wave;

/* Answer of a short circuit at a radius. */
static cplx ended(const state *w, double reach, int medium)
{
    cplx i0, k0;

    lstub__bessel_zik0(cplx_scale(w->kappa[medium], reach), &i0, &k0);
    return cplx_neg(cplx_div(k0, i0));
}

static void common(state *w, const cav_region *r, cplx *gamma)
{
    const cav_slab *s = &w->m->slab[r->ref];
    int i;

    for (i = 0; i < 4; i++) gamma[i] = cplx_of(0.0, 0.0);
    if (s->outer == LSTUB__CAV_RING) {
        memcpy(gamma, cav_echo_of(w, s)->gamma, 4 * sizeof gamma[0]);
    } else if (s->outer == LSTUB__CAV_WALL) {
        gamma[0] = ended(w, s->r_out, s->medium);
    }
}

static wave wave_of(state *w, const cav_slab *s, int barrel)
{
    wave v;

    v.h = s->h;
    v.barrel = barrel;
    v.metal = v.ended = cplx_of(0.0, 0.0);
    cav_wave_of(w, s, &v.t, &v.c, &v.own);
    return v;
}

/* R from Gamma: own - c G c, G = Gamma (1 + T Gamma)^-1. */
static int admittances(const wave *v, int n, const cplx *gamma, cplx *r)
{
    cplx m[MOST * MOST], x[MOST * MOST];
    int i, j;

    for (i = 0; i < n; i++)                     /* transposed: G' = (1 + T Gamma)^-T Gamma' */
        for (j = 0; j < n; j++) {
            m[j * n + i] = cplx_mul(v[i].t, gamma[i * n + j]);
            if (i == j) m[j * n + i].re += 1.0;
            x[j * n + i] = gamma[i * n + j];
        }
    if (lstub__zsolve(m, n, n, x, n, n) != 0) return -1;
    for (i = 0; i < n; i++)
        for (j = 0; j < n; j++) {
            r[i * n + j] = cplx_neg(cplx_mul(cplx_mul(v[i].c, x[j * n + i]), v[j].c));
            if (i == j) r[i * n + j] = cplx_add(r[i * n + j], v[i].own);
        }
    return 0;
}

static void close_waves(cav_load *l, const cplx *k, const wave *v, int n)
{
    cplx a[MOST * MOST], x[MOST * (CAV_WIDE + CAV_TRACES)];
    int t = l->traces, wide = l->n + t, i, j, p;

    for (i = 0; i < n; i++) {
        for (j = 0; j < n; j++) {
            cplx sum = cplx_of(i == j ? 1.0 : 0.0, 0.0);
            for (p = 0; p < n; p++) sum = cplx_fms(sum, k[i * n + p], l->zeta[(t + p) * CAV_COLUMNS + t + j]);
            a[i * n + j] = cplx_fma(sum, k[i * n + j], v[j].metal);
        }
        for (j = 0; j < wide; j++) {
            cplx sum = cplx_of(0.0, 0.0);
            for (p = 0; p < n; p++)
                sum = cplx_fma(sum, k[i * n + p], j < l->n ? l->s[j * CAV_COLUMNS + t + p] : l->zeta[(t + p) * CAV_COLUMNS + j - l->n]);
            x[i * wide + j] = sum;
        }
    }
    l->columns = t;
    if (lstub__zsolve(a, n, n, x, wide, wide) != 0) { l->y[0] = cplx_of(NAN, NAN); return; }
    for (i = 0; i < l->n; i++)
        for (p = 0; p < n; p++) {
            cplx sp = l->s[i * CAV_COLUMNS + t + p];
            for (j = 0; j <= i; j++) l->y[i * l->n + j] = cplx_fma(l->y[i * l->n + j], sp, x[p * wide + j]);
            for (j = 0; j < t; j++) l->s[i * CAV_COLUMNS + j] = cplx_fma(l->s[i * CAV_COLUMNS + j], sp, x[p * wide + l->n + j]);
        }
    for (i = 0; i < l->n; i++) for (j = 0; j < i; j++) l->y[j * l->n + i] = l->y[i * l->n + j];
    for (i = 0; i < t; i++)
        for (j = 0; j < t; j++)
            for (p = 0; p < n; p++)
                l->zeta[i * CAV_COLUMNS + j] = cplx_fma(l->zeta[i * CAV_COLUMNS + j], l->zeta[i * CAV_COLUMNS + t + p], x[p * wide + l->n + j]);
}

void cav_region_end(state *w, const cav_region *r, cav_load *l)
{
    const lstub__cavity *m = w->m;
    cplx gamma[MOST * MOST], admittance[MOST * MOST], k[MOST * MOST], c[4], d;
    wave v[MOST];
    int n = 0, i, j, b, q;

    for (i = r->last; i >= r->first; i--)       /* in the order in which they were stepped over */
        for (b = 0; b < m->barrels; b++) {
            v[n] = wave_of(w, &m->slab[b * m->slabs + i], b);
            v[n++].ended = ended(w, r->reach, m->slab[i].medium);
        }
    common(w, r, c);
    d = ended(w, r->reach, m->slab[r->ref].medium);
    for (i = 0; i < n; i++)
        for (j = 0; j < n; j++) {
            double share = v[j].h / r->height;
            int same = v[i].barrel == v[j].barrel;
            cplx *to = &gamma[i * n + j];
            *to = r->height == INFINITY ? cplx_of(0.0, 0.0) : cplx_scale(m->barrels > 1 ? c[2 * v[i].barrel + v[j].barrel] : c[0], share);
            if (same && r->height < INFINITY) *to = cplx_sub(*to, cplx_scale(d, share));
            if (i == j) *to = cplx_add(*to, v[i].ended);
        }
    if (admittances(v, n, gamma, admittance) != 0) { l->y[0] = cplx_of(NAN, NAN); return; }
    for (i = 0; i < n; i++) for (j = 0; j < n; j++) k[i * n + j] = cplx_scale(admittance[i * n + j], -1.0 / (w->k0 * w->k0 * v[j].h));
    for (i = 0, q = r->last; q >= r->first; q--)
        for (b = 0; b < m->barrels; b++, i++) {
            const cav_slab *s = &m->slab[b * m->slabs + q];
            if (s->r_in > 0.0) {                /* as a loop of its own, with and without the metal */
                cplx bare = cplx_inv(k[i * n + i]), lossy = bare;
                cav_add_metal(w, s, &lossy, 1, 1);
                v[i].metal = cplx_sub(lossy, bare);
            }
        }
    close_waves(l, k, v, n);
}
