/*
** One frequency of a compiled cavity model, without a single allocation: from the lowest face upwards.
**
** Admittances are in units of 2 pi jw eps0. What hangs below a slab, I_bottom = Y V_bottom, becomes what hangs at its top,
** Y <- T - C (Y + B)^-1 C'. Two barrels stand side by side in one vector; mode 0 ties them together (cavity_pair.c). A trace
** leaves at a face: I_up = I_low + I_o on all annuli, its voltage is the sum of theirs. Going up, I = Y V + s I_o,
** V_o = s.V + zeta I_o.
*/
#include "model/cavity_cascade.h"

/* ---- steps -------------------------------------------------------------------------------------- */

void cav_invert(const cplx *a, int n, cplx *out)
{
    cplx det;

    if (n == 1) { out[0] = cplx_inv(a[0]); return; }
    det = cplx_inv(cplx_fms(cplx_mul(a[0], a[3]), a[1], a[2]));
    out[0] = cplx_mul(a[3], det);
    out[3] = cplx_mul(a[0], det);
    out[1] = out[2] = cplx_neg(cplx_mul(a[1], det));
}

/* Columns (traces, pending waves) seen through a slab; g: see cav_step_up. New pending waves come last. */
static void columns_up(cav_load *l, const cav_step *c, const cplx *g, int wide, const cplx *gamma, cplx d[2][CAV_WIDE])
{
    cplx turned[2 * CAV_COLUMNS];
    int t = l->columns, n = c->loops, np = c->pending, at = c->na + n + np, i, j, k, q;

    for (q = 0; q < n; q++)                     /* gamma bottom' M^-1 s */
        for (j = 0; j < t; j++) {
            turned[q * t + j] = cplx_of(0.0, 0.0);
            for (k = 0; k < n; k++) turned[q * t + j] = cplx_fma(turned[q * t + j], gamma[q * n + k], g[(c->na + k) * wide + at + j]);
        }
    for (i = 0; i < t; i++)
        for (j = 0; j < t; j++) {
            cplx *to = &l->zeta[i * CAV_COLUMNS + j];
            *to = cplx_sub(*to, g[(at + i) * wide + at + j]);
            for (q = 0; q < n; q++) *to = cplx_fma(*to, g[(c->na + q) * wide + at + i], turned[q * t + j]);
        }
    for (i = 0; i < c->na; i++) {
        for (j = 0; j < t; j++) {
            cplx sum = g[i * wide + at + j];
            for (q = 0; q < n; q++) sum = cplx_fma(sum, d[q][i], turned[q * t + j]);
            l->s[i * CAV_COLUMNS + j] = sum;
        }
        for (q = 0; q < np; q++) l->s[i * CAV_COLUMNS + t + q] = cplx_sub(c->top[q][i], g[i * wide + c->na + q]);
    }
    for (q = 0; q < np; q++) {
        for (k = 0; k < np; k++) l->zeta[(t + q) * CAV_COLUMNS + t + k] = cplx_neg(g[(c->na + q) * wide + c->na + k]);
        for (j = 0; j < t; j++) l->zeta[(t + q) * CAV_COLUMNS + j] = l->zeta[j * CAV_COLUMNS + t + q] = g[(c->na + q) * wide + at + j];
    }
    l->columns += np;
}

/*
** With mode 0's terms (top, -bottom) loop^-1 (top, -bottom)' kept apart,
**
**     Y <- T - C M^-1 C' + d gamma d',  M = Y + B,  d = top - C M^-1 bottom,  1/gamma = loop + bottom' M^-1 bottom,
**
** all of it found in g = (C', bottom, s)' M^-1 (C', bottom, s). A pending wave of current j adds top j and bottom j to the
** currents; its e = top.V_top - bottom.V_bottom is kept as a trace's voltage is, until its region ends.
*/
int cav_step_up(cav_load *l, const cav_step *c)
{
    int na = c->na, nb = c->nb, n = c->loops, extra = n + c->pending, wide = na + extra + l->columns, i, j, k, q;
    cplx m[CAV_WIDE * CAV_WIDE], r[CAV_WIDE * CAV_ALL], g[CAV_ALL * CAV_ALL], d[2][CAV_WIDE], e[2][CAV_WIDE], loop[4], gamma[4];

    for (i = 0; i < nb; i++) {
        for (j = i; j < nb; j++) m[i * nb + j] = cplx_add(c->bb[i * nb + j], l->y[i * nb + j]);
        for (j = 0; j < na; j++) r[i * wide + j] = c->tb[j * nb + i];
        for (q = 0; q < extra; q++) r[i * wide + na + q] = c->bottom[q][i];
        for (j = 0; j < l->columns; j++) r[i * wide + na + extra + j] = l->s[i * CAV_COLUMNS + j];
    }
    if (lstub__zgram(m, nb, r, wide, g) != 0) return -1;
    for (q = 0; q < n; q++) {
        for (k = 0; k < n; k++) loop[q * n + k] = cplx_add(c->loop[q * n + k], g[(na + q) * wide + na + k]);
        for (i = 0; i < na; i++) d[q][i] = cplx_sub(c->top[q][i], g[i * wide + na + q]);
    }
    if (n > 0) cav_invert(loop, n, gamma);
    if (l->columns + c->pending > 0) columns_up(l, c, g, wide, gamma, d);
    for (q = 0; q < n; q++)
        for (i = 0; i < na; i++) {
            e[q][i] = cplx_mul(gamma[q * n], d[0][i]);
            if (n == 2) e[q][i] = cplx_fma(e[q][i], gamma[q * n + 1], d[1][i]);
        }
    for (i = 0; i < na; i++) {
        for (j = 0; j <= i; j++) {
            cplx sum = cplx_sub(c->tt[i * na + j], g[i * wide + j]);
            for (q = 0; q < n; q++) sum = cplx_fma(sum, e[q][i], d[q][j]);
            l->y[i * na + j] = l->y[j * na + i] = sum;
        }
    }
    l->n = na;
    return 0;
}

/* ---- the ends ----------------------------------------------------------------------------------- */

/* Block-diagonal: one half-space below (above) each barrel. */
static void half_spaces(const state *w, const int *opening, const double *const *half, cav_load *l)
{
    const lstub__cavity *m = w->m;
    cplx y[CAV_CELLS * CAV_CELLS];
    int b, i, j, at = 0;

    l->n = 0;
    for (b = 0; b < m->barrels; b++) l->n += m->opening[opening[b]].cells;
    for (i = 0; i < l->n * l->n; i++) l->y[i] = cplx_of(0.0, 0.0);
    for (b = 0; b < m->barrels; b++) {
        int n = m->opening[opening[b]].cells;
        cav_half_admittance(w, half[b], n, y);
        for (i = 0; i < n; i++) for (j = 0; j < n; j++) l->y[(at + i) * l->n + at + j] = y[i * n + j];
        at += n;
    }
}

/* Where trace `number` of barrel b joins: on all annuli of its face. cells: of each barrel at this face. */
static void join_trace(const lstub__cavity *m, cav_load *l, const int *cells, int b, int number)
{
    int column = (b == 0 ? 0 : m->taps[0]) + number, from = b == 0 ? 0 : cells[0], k;

    for (k = 0; k < cells[b]; k++) l->s[(from + k) * CAV_COLUMNS + column] = cplx_of(1.0, 0.0);
}

static void start_traces(const lstub__cavity *m, cav_load *l)
{
    int i;

    l->traces = l->columns = m->taps[0] + (m->barrels > 1 ? m->taps[1] : 0);
    for (i = 0; i < CAV_COLUMNS * l->traces; i++) l->zeta[i] = cplx_of(0.0, 0.0);
    for (i = 0; i < CAV_WIDE * CAV_COLUMNS && l->traces > 0; i++) l->s[i] = cplx_of(0.0, 0.0);
}

/* Ports of the load: currents into the feeds (or nothing, under a free end) and out of the traces. */
static int ports_of(const cav_load *l, int feeds, cplx unit, cplx *z)
{
    int n = l->n, t = l->traces, columns = feeds + t, i, j, k;
    cplx y[CAV_WIDE * CAV_WIDE], x[CAV_WIDE * (2 + CAV_TRACES)];

    memcpy(y, l->y, (size_t)(n * n) * sizeof y[0]);
    for (i = 0; i < n; i++) {
        for (j = 0; j < feeds; j++) x[i * columns + j] = cplx_of(i == j ? 1.0 : 0.0, 0.0);
        for (j = 0; j < t; j++) x[i * columns + feeds + j] = l->s[i * CAV_COLUMNS + j];
    }
    if (lstub__zsolve(y, n, n, x, columns, columns) != 0) return -1;
    for (j = 0; j < columns; j++) {
        for (i = 0; i < feeds; i++) z[i * columns + j] = cplx_mul(unit, x[i * columns + j]);
        for (i = 0; i < t; i++) {
            cplx sum = j < feeds ? cplx_of(0.0, 0.0) : cplx_neg(l->zeta[i * CAV_COLUMNS + j - feeds]);
            for (k = 0; k < n; k++) sum = cplx_fma(sum, l->s[k * CAV_COLUMNS + i], x[k * columns + j]);
            z[(feeds + i) * columns + j] = cplx_mul(unit, sum);
        }
    }
    return 0;
}

/* From the far end of the feeding lines to depth 0: V1 = cos V + j Z0 sin I, I1 = cos I + j sin V/Z0. */
static int along_feed(const state *w, int feeds, int ports, cplx *z)
{
    const lstub__cavity *m = w->m;
    cplx er = cplx_scale(w->eps[m->port_medium], m->ratio[m->port_medium]), root = cplx_sqrt(er), e, c, js, z0, js_z, js_y;
    cplx a[4], x[2 * LSTUB__CAV_PORTS], i1[2 * LSTUB__CAV_PORTS], out[LSTUB__CAV_PORTS * LSTUB__CAV_PORTS];
    int i, j, k;

    z0 = cplx_scale(cplx_inv(root), m->port_log * LSTUB_ETA0 / (2.0 * LSTUB_PI));
    e = cplx_scale(root, w->k0 * m->feed_length);
    e = cplx_exp(cplx_of(-e.im, e.re));
    c = cplx_scale(cplx_add(e, cplx_inv(e)), 0.5);
    js = cplx_scale(cplx_sub(e, cplx_inv(e)), 0.5);
    js_z = cplx_mul(js, z0);
    js_y = cplx_div(js, z0);
    for (i = 0; i < feeds; i++) {
        for (j = 0; j < feeds; j++) a[i * feeds + j] = cplx_sub(i == j ? c : cplx_of(0.0, 0.0), cplx_mul(js_y, z[i * ports + j]));
        for (j = 0; j < ports; j++) {
            x[i * ports + j] = z[i * ports + j];
            if (j < feeds) x[i * ports + j] = cplx_sub(cplx_mul(c, z[i * ports + j]), i == j ? js_z : cplx_of(0.0, 0.0));
        }
    }
    if (lstub__zsolve(a, feeds, feeds, x, ports, ports) != 0) return -1;
    for (i = 0; i < feeds; i++)             /* currents at the far end per ampere into each port */
        for (j = 0; j < ports; j++) i1[i * ports + j] = cplx_fma(i == j ? c : cplx_of(0.0, 0.0), js_y, x[i * ports + j]);
    for (i = 0; i < ports; i++)
        for (j = 0; j < ports; j++) {
            cplx sum = j < feeds ? cplx_of(0.0, 0.0) : z[i * ports + j];
            if (i < feeds) { out[i * ports + j] = x[i * ports + j]; continue; }
            for (k = 0; k < feeds; k++) sum = cplx_fma(sum, z[i * ports + k], i1[k * ports + j]);
            out[i * ports + j] = sum;
        }
    memcpy(z, out, (size_t)(ports * ports) * sizeof out[0]);
    return 0;
}

/* From feeds first, then traces, to barrel by barrel. */
static void sort_ports(const lstub__cavity *m, int feeds, int ports, cplx *z)
{
    cplx in[LSTUB__CAV_PORTS * LSTUB__CAV_PORTS];
    int place[LSTUB__CAV_PORTS], n = 0, b, i, j;

    if (m->barrels == 1) return;
    for (b = 0; b < 2; b++) {
        if (feeds > 0) place[n++] = b;
        for (i = 0; i < m->taps[b]; i++) place[n++] = feeds + (b == 0 ? 0 : m->taps[0]) + i;
    }
    memcpy(in, z, (size_t)(ports * ports) * sizeof in[0]);
    for (i = 0; i < ports; i++) for (j = 0; j < ports; j++) z[i * ports + j] = in[place[i] * ports + place[j]];
}

/* ---- the whole ---------------------------------------------------------------------------------- */

static int climb(state *w, cav_load *l)
{
    const lstub__cavity *m = w->m;
    cav_step c;
    cav_room room;
    cav_w flux;
    int i, b, cells[2];

    cav_flux_start(w, &flux);
    start_traces(m, l);
    l->n = 0;
    if (m->half_opening[0] >= 0) half_spaces(w, m->half_opening, m->half, l);
    for (i = m->slabs - 1; i >= 0; i--) {
        const cav_slab *s = &m->slab[i];
        if (m->lid_top && i == 0) break;
        for (b = 0; b < m->barrels; b++) cells[b] = s[b * m->slabs].bottom >= 0 ? m->opening[s[b * m->slabs].bottom].cells : 0;
        for (b = 0; b < m->barrels; b++)
            if (s[b * m->slabs].tap >= 0) join_trace(m, l, cells, b, s[b * m->slabs].tap);
        if (flux.on && i < m->feed) cav_flux_stop(&flux, l);
        if (flux.on && s->plane && s->r_in > 0.0) cav_flux_plane(w, &flux, s, l);
        cav_step_make(w, i, &flux, &room, &c);
        if (cav_step_up(l, &c) != 0) return -1;
        if (cav_shared(w, s) && i == m->region[s->region].first) cav_region_end(w, &m->region[s->region], l);
    }
    if (m->feed == 0) {
        if (flux.on) cav_flux_stop(&flux, l);
        for (b = 0; b < m->barrels; b++) cells[b] = m->opening[m->cap_opening[b]].cells;
        for (b = 0; b < m->barrels; b++) if (m->cap_tap[b] >= 0) join_trace(m, l, cells, b, m->cap_tap[b]);
        cav_load above;                         /* what the barrel's upper end sees: the space under a lid, or open */
        above.n = above.traces = above.columns = 0;
        if (m->lid_top) {
            cav_step_make(w, 0, &flux, &room, &c);
            if (cav_step_up(&above, &c) != 0) return -1;
        } else {
            half_spaces(w, m->cap_opening, m->half_top, &above);
        }
        for (i = 0; i < l->n * l->n; i++) l->y[i] = cplx_add(l->y[i], above.y[i]);
    }
    return 0;
}

int lstub__cavity_ports(const lstub__cavity *m, double freq, const cplx *eps, const cplx *surface, cplx *z)
{
    state w;
    cav_load l;
    double omega = 2.0 * LSTUB_PI * freq;
    int feeds = m->feed > 0 ? m->barrels : 0, ports = feeds + m->taps[0] + (m->barrels > 1 ? m->taps[1] : 0), failed, i, j;

    cav_state(&w, m, omega / LSTUB_C0, eps, surface);
    failed = climb(&w, &l);
    if (!failed) failed = ports_of(&l, feeds, cplx_of(0.0, 1.0 / (-2.0 * LSTUB_PI * omega * LSTUB_EPS0)), z);
    if (!failed) cav_take_sheets(&w, feeds, ports, z);
    if (!failed && feeds > 0) failed = along_feed(&w, feeds, ports, z);
    if (failed) {
        for (i = 0; i < ports * ports; i++) z[i] = cplx_of(NAN, NAN);
        return -1;
    }
    for (i = 0; i < ports; i++)                 /* reciprocal to the last digit */
        for (j = 0; j < i; j++) z[i * ports + j] = z[j * ports + i] = cplx_scale(cplx_add(z[i * ports + j], z[j * ports + i]), 0.5);
    sort_ports(m, feeds, ports, z);
    return ports;
}

cplx lstub__cavity_zin(const lstub__cavity *m, double freq, const cplx *eps)
{
    cplx z[LSTUB__CAV_PORTS * LSTUB__CAV_PORTS];

    lstub__cavity_ports(m, freq, eps, NULL, z);
    return z[0];
}

double lstub__cavity_limit(const lstub__cavity *m, const cplx *eps)
{
    double limit = INFINITY;
    int i;

    for (i = 0; i < m->barrels * m->slabs; i++) {
        double f = LSTUB_C0 / (2.0 * LSTUB_PI) * sqrt(m->kernel[m->slab[i].kernel].u_max / eps[m->slab[i].medium].re);
        if (f < limit) limit = f;
    }
    return limit;
}
