/*
** Return vias and a partner barrel, in one complex number per dielectric and frequency.
**
** The barrel sends K0(kappa rho), a partner the same with its sign. Via j answers with c_jp K_|p|(kappa rho_j) e^(j p phi_j); E_z = 0 on each via, order by
** order (Graf's addition theorem), gives a linear system. The answer at the barrel is Gamma I0(kappa rho). Orders beyond
** 0 are needed: with p = 0 alone the notch is 1 to 2 % low. A barrel answers with p = -1, 1 too where the axial flux that its
** transverse field sends through the openings is counted: one without the other is worse than neither.
*/
#include "model/cavity_model.h"
#include "num/bessel.h"
#include "num/dense.h"

#include <stdlib.h>

#define ORDERS   2                  /* |p| for a few vias, one less for many */
#define FEW      4
#define UNKNOWNS ((2 * (ORDERS - 1) + 1) * LSTUB__CAV_VIAS + 4)    /* more than a FEW with all orders; two barrels */

/* e^(j p theta) of the direction (dx, dy), any sign of p. */
static cplx turn(double dx, double dy, int p)
{
    double d = hypot(dx, dy);
    cplx one = cplx_of(dx / d, (p < 0 ? -dy : dy) / d), out = cplx_of(1.0, 0.0);

    for (p = abs(p); p > 0; p--) out = cplx_mul(out, one);
    return out;
}

/* K and I of orders 0 .. top at a via's own rim, as the ratio K/I, unscaled. */
static void rim_ratio(cplx kappa, double radius, int top, cplx *ratio)
{
    cplx k[ORDERS + 2], i[ORDERS + 2], e2 = cplx_exp(cplx_scale(kappa, -2.0 * radius));
    int q;

    lstub__bessel_zkn(cplx_scale(kappa, radius), top + 1, k);
    lstub__bessel_zin(cplx_scale(kappa, radius), top + 1, i);
    for (q = 0; q <= top; q++) ratio[q] = cplx_mul(cplx_div(k[q], i[q]), e2);
}

/* K of orders 0 .. n at a distance, unscaled. */
static void waves(cplx kappa, double d, int n, cplx *k)
{
    cplx decay = cplx_exp(cplx_scale(kappa, -d));
    int q;

    lstub__bessel_zkn(cplx_scale(kappa, d), n, k);
    for (q = 0; q <= n; q++) k[q] = cplx_mul(k[q], decay);
}

/*
** Between planes with edges only order 0 knows of these (cavity_edge.c). What other orders radiate then has nowhere to go: of K_m
** there is left the part that stands, K_m + j pi/2 (-1)^m I_m, for which nothing leaves without loss; of edges so far that little
** comes back, e^(-2 kappa distance), as much less.
*/
static cplx standing(cplx k, cplx i, int m, double part)
{
    double f = (m & 1 ? -0.5 : 0.5) * LSTUB_PI * part;

    return cplx_of(k.re - f * i.im, k.im + f * i.re);
}

/* waves(), but for order 0, made to stand; *same: K0 so, for waves of equal orders other than 0. */
static void near_waves(cplx kappa, double d, int n, double edges, cplx *k, cplx *same)
{
    cplx i[2 * ORDERS + 2], rise = cplx_exp(cplx_scale(kappa, d));
    int m;

    waves(kappa, d, n, k);
    *same = k[0];
    if (edges == 0.0) return;
    lstub__bessel_zin(cplx_scale(kappa, d), n, i);
    *same = standing(k[0], cplx_mul(i[0], rise), 0, edges);
    for (m = 1; m <= n; m++) k[m] = standing(k[m], cplx_mul(i[m], rise), m, edges);
}

/* What a source at distance (dx, dy) from a via, seen from the source, sends into its order q, with the sign of the
** right-hand side. */
static cplx sent(const cplx *k, double dx, double dy, int q)
{
    return cplx_scale(cplx_mul(k[abs(q)], turn(dx, dy, -q)), q & 1 ? 1.0 : -1.0);
}

/*
** Vias evenly spread about the barrel: via i answers as via 0 does, turned, c_ip = c_p e^(-j p phi_i), so that there are
** as many unknowns as orders.
*/
static cplx even_ring(const lstub__cav_returns *r, cplx kappa)
{
    const int top = ORDERS, width = 2 * ORDERS + 1;
    const lstub__cav_via *v = r->via;
    cplx a[(2 * ORDERS + 1) * (2 * ORDERS + 1)], b[2 * ORDERS + 1], k[2 * ORDERS + 1], ratio[ORDERS + 1];
    cplx gamma = cplx_of(0.0, 0.0);
    double s = v->x;
    int i, p, q;

    rim_ratio(kappa, v->radius, top, ratio);
    for (q = -top; q <= top; q++)
        for (p = -top; p <= top; p++) a[(q + top) * width + p + top] = p == q ? ratio[abs(q)] : cplx_of(0.0, 0.0);
    for (i = 1; i < r->even; i++) {
        double phi = 2.0 * LSTUB_PI * i / r->even, x = s * cos(phi), y = s * sin(phi), dx = s - x, dy = -y;
        waves(kappa, hypot(dx, dy), 2 * top, k);
        for (q = -top; q <= top; q++)
            for (p = -top; p <= top; p++) {
                cplx *at = &a[(q + top) * width + p + top];
                cplx t = cplx_mul(cplx_mul(k[abs(p - q)], turn(dx, dy, p - q)), turn(x, y, -p));
                *at = cplx_add(*at, cplx_scale(t, q & 1 ? -1.0 : 1.0));
            }
    }
    waves(kappa, s, top, k);
    for (q = -top; q <= top; q++) b[q + top] = sent(k, s, 0.0, q);
    if (lstub__zsolve(a, width, width, b, 1, 1) != 0) return cplx_of(NAN, NAN);
    for (p = -top; p <= top; p++) gamma = cplx_fma(gamma, cplx_mul(k[abs(p)], turn(-s, 0.0, p)), b[p + top]);
    return cplx_scale(gamma, r->even);
}

unsigned cav_joining(const lstub__cav_returns *r, double above, double below)
{
    const double slack = 1e-9;
    unsigned mask = 0;
    int i;

    if (above == -INFINITY || below == INFINITY) return CAV_BEYOND;     /* no pair of planes: nothing to join */
    for (i = 0; i < r->vias; i++) {
        const lstub__cav_via *v = &r->via[i];
        if ((v->from == 0.0 && v->to == 0.0) || (v->from <= above + slack && v->to >= below - slack)) mask |= 1u << i;
    }
    return mask;
}

typedef struct scatterer {
    double x, y, radius;
    int    barrel;              /* 0, 1: that barrel, orders -1 and 1 alone; -1: a return via */
    int    first, orders, order[2 * ORDERS + 1];
} scatterer;

static int list_scatterers(const lstub__cav_returns *r, unsigned mask, int barrels, double radius, int top, scatterer *list)
{
    int count = 0, unknowns = 0, i, p;

    for (i = 0; i < r->vias; i++) {
        scatterer *s = &list[count];
        if (!(mask >> i & 1u)) continue;
        s->x = r->via[i].x; s->y = r->via[i].y; s->radius = r->via[i].radius;
        s->barrel = -1;
        for (s->orders = 0, p = -top; p <= top; p++) s->order[s->orders++] = p;
        s->first = unknowns;
        unknowns += s->orders;
        count++;
    }
    for (i = 0; i < 2; i++) {
        scatterer *s = &list[count];
        if (!(barrels >> i & 1)) continue;
        s->x = i * r->pitch; s->y = 0.0; s->radius = radius;
        s->barrel = i;
        s->order[0] = -1; s->order[1] = 1;
        s->orders = 2;
        s->first = unknowns;
        unknowns += 2;
        count++;
    }
    return count;
}

/* What the wave of scatterer i becomes at scatterer j, and back. */
static void couple(const scatterer *i, const scatterer *j, cplx kappa, double edges, cplx *a, int n)
{
    cplx k[2 * ORDERS + 1], turns[2 * ORDERS + 1], same;
    double dx = j->x - i->x, dy = j->y - i->y, d = hypot(dx, dy);
    int top = i->order[i->orders - 1] + j->order[j->orders - 1], u, v;

    near_waves(kappa, d, top, edges, k, &same);
    turns[0] = cplx_of(1.0, 0.0);
    for (u = 1; u <= top; u++) turns[u] = cplx_mul(turns[u - 1], cplx_of(dx / d, dy / d));
    for (v = 0; v < j->orders; v++) {
        for (u = 0; u < i->orders; u++) {
            int p = i->order[u], q = j->order[v], m = abs(p - q);
            cplx turn_there = p < q ? cplx_conj(turns[m]) : turns[m];           /* e^(j (p - q) theta) */
            cplx wave = m == 0 && p != 0 ? same : k[m];
            cplx there = cplx_mul(wave, turn_there), here = cplx_scale(cplx_mul(wave, cplx_conj(turn_there)), m & 1 ? -1.0 : 1.0);
            a[(j->first + v) * n + i->first + u] = cplx_scale(there, q & 1 ? -1.0 : 1.0);
            a[(i->first + u) * n + j->first + v] = cplx_scale(here, p & 1 ? -1.0 : 1.0);
        }
    }
}

/*
** The transverse field at barrel 0 per unit current, and with it the squared shape J of the flux: cavity_flux.c.
*/
static cplx flux_shape(const lstub__cav_returns *r, cplx c_minus, cplx c_plus, cplx ratio, double a, cplx kappa)
{
    double big = r->opening + log(2.0) / LSTUB_PI * r->height, al = a / big, al2 = al * al, t = 0.5 * r->pitch / big, big2 = big * big;
    cplx minus = cplx_neg(cplx_mul(c_minus, ratio)), plus = cplx_neg(cplx_mul(c_plus, ratio)), unit = cplx_scale(kappa, 0.25 / LSTUB_PI), j, x, y, d;

    x = cplx_mul(unit, cplx_add(plus, minus));
    y = cplx_mul(unit, cplx_sub(plus, minus));
    y = cplx_of(-y.im, y.re);
    if (r->slot) {
        double own = (r->sign < 0.0 ? 0.0542 - 0.402 * exp(-2.412 * t) : 0.0402 + 0.549 * exp(-3.357 * t)) / big;
        j = cplx_of(own - x.re, -x.im);             /* from the partner towards the barrel: -x */
        j = cplx_scale(cplx_mul(j, j), 1.05 * big2 * big2 * (LSTUB_PI / 8.0 + 2.0 * t / 3.0 + al2 * (3.21 + 0.545 * t) - 2.22 * al2 * al2));
    } else {
        j = cplx_add(cplx_mul(x, x), cplx_mul(y, y));
        j = cplx_scale(j, LSTUB_PI * big2 * big2 * (0.25 + al2 - al2 * al2 * log(al) - 1.25 * al2 * al2));
    }
    d = cplx_scale(cplx_mul(kappa, kappa), -0.25 * big2);
    d.re += 1.0;
    return cplx_div(j, d);
}

/* Adds what the planes' edges send back: between order 0 of all vias and the barrels as sources. */
static void add_edges(const lstub__cav_returns *r, const scatterer *list, int count, cplx kappa, int two, cplx *a, int n, cplx *b, int columns)
{
    int i, j, s, sources = r->pitch > 0.0 ? 2 : 1;

    for (j = 0; j < count; j++) {
        int row = list[j].first + list[j].orders / 2;
        if (list[j].barrel >= 0) continue;                          /* its order 0 is its own current */
        for (i = 0; i < count; i++) {
            cplx *to = &a[row * n + list[i].first + list[i].orders / 2];
            if (list[i].barrel < 0) *to = cplx_add(*to, cav_edge(r, kappa, list[j].x, list[j].y, list[i].x, list[i].y));
        }
        for (s = 0; s < sources; s++) {
            cplx *to = &b[row * columns + (two ? s : 0)], e = cav_edge(r, kappa, list[j].x, list[j].y, s * r->pitch, 0.0);
            *to = cplx_sub(*to, cplx_scale(e, s == 1 && !two ? r->sign : 1.0));
        }
    }
}

/* The same arriving at the barrels. */
static void add_edges_back(const lstub__cav_returns *r, const scatterer *list, int count, cplx kappa, int two, const cplx *b, int columns,
                           cplx *gamma)
{
    int i, j, s, p, sources = r->pitch > 0.0 ? 2 : 1;

    for (s = 0; s < columns; s++) {
        for (p = 0; p < sources; p++) {
            cplx e = cav_edge(r, kappa, s * r->pitch, 0.0, p * r->pitch, 0.0), *to = &gamma[columns * s + (two ? p : 0)];
            *to = cplx_add(*to, cplx_scale(e, p == 1 && !two ? r->sign : 1.0));
        }
        for (j = 0; j < count; j++) {
            int row = list[j].first + list[j].orders / 2;
            cplx e;
            if (list[j].barrel >= 0) continue;
            e = cav_edge(r, kappa, s * r->pitch, 0.0, list[j].x, list[j].y);
            for (i = 0; i < columns; i++) gamma[columns * s + i] = cplx_fma(gamma[columns * s + i], e, b[row * columns + i]);
        }
    }
}

void cav_ring(const lstub__cav_returns *r, unsigned mask, int barrels, double radius, cplx kappa, int two, cav_echo *out)
{
    scatterer list[LSTUB__CAV_VIAS + 2];
    cplx a[UNKNOWNS * UNKNOWNS], b[UNKNOWNS * 2], k[2 * ORDERS + 1], ratio[ORDERS + 1], barrel_ratio = cplx_of(0.0, 0.0), direct = cplx_of(0.0, 0.0), same;
    int vias = 0, top, count, n, i, j, v, s, columns = two ? 2 : 1, edges = r->edge[0] > 0.0 && !(mask & CAV_BEYOND);
    double returned = edges ? exp(-2.0 * kappa.re * fmin(fmin(r->edge[0], r->edge[1]), fmin(r->edge[2], r->edge[3]))) : 0.0;
    const cplx zero = cplx_of(0.0, 0.0);

    for (i = 0; i < r->vias; i++) vias += (int)(mask >> i & 1u);
    for (i = 0; i < 4; i++) out->gamma[i] = zero;
    out->flux = zero;
    if (r->even > 1) { if (vias > 0) out->gamma[0] = even_ring(r, kappa); return; }
    if (!two && (barrels & 1) && r->pitch > 0.0) barrels |= 2;      /* one mode: the partner is there as the barrel is */
    top = vias <= FEW ? ORDERS : ORDERS - 1;
    count = list_scatterers(r, mask, r->flux ? barrels : 0, radius, top, list);
    n = count > 0 ? list[count - 1].first + list[count - 1].orders : 0;
    for (i = 0; i < n * n; i++) a[i] = zero;
    for (i = 0; i < n * columns; i++) b[i] = zero;
    for (j = 0; j < count; j++) {
        const scatterer *at = &list[j];

        rim_ratio(kappa, at->radius, at->order[at->orders - 1], ratio);
        for (v = 1; edges && v <= at->order[at->orders - 1]; v++) ratio[v] = standing(ratio[v], cplx_of(1.0, 0.0), v, returned);
        if (at->barrel == 0) barrel_ratio = ratio[1];
        for (v = 0; v < at->orders; v++) a[(at->first + v) * n + at->first + v] = ratio[abs(at->order[v])];
        for (s = 0; s < (r->pitch > 0.0 ? 2 : 1); s++) {            /* the barrels as sources */
            double dx = at->x - s * r->pitch;
            if (at->barrel == s) continue;
            near_waves(kappa, hypot(dx, at->y), at->order[at->orders - 1] + 1, returned, k, &same);
            for (v = 0; v < at->orders; v++) {
                cplx *to = &b[(at->first + v) * columns + (two ? s : 0)];
                *to = cplx_add(*to, cplx_scale(sent(k, dx, at->y, at->order[v]), s == 1 && !two ? r->sign : 1.0));
            }
        }
        for (i = 0; i < j; i++) couple(&list[i], at, kappa, returned, a, n);
    }
    if (edges) add_edges(r, list, count, kappa, two, a, n, b, columns);
    if (n > 0 && lstub__zsolve(a, n, n, b, columns, columns) != 0) { out->gamma[0] = cplx_of(NAN, NAN); return; }
    if (r->pitch > 0.0) {
        waves(kappa, r->pitch, 1, k);
        direct = k[0];
    }
    if (two) out->gamma[1] = out->gamma[2] = direct;
    else out->gamma[0] = cplx_scale(direct, r->sign);
    for (j = 0; j < count; j++) {
        const scatterer *from = &list[j];
        for (s = 0; s < columns; s++) {                             /* arriving at barrel s */
            double dx = s * r->pitch - from->x;
            if (from->barrel == s) continue;
            near_waves(kappa, hypot(dx, from->y), from->order[from->orders - 1] + 1, returned, k, &same);
            for (v = 0; v < from->orders; v++) {
                cplx t = cplx_mul(k[abs(from->order[v])], turn(dx, -from->y, from->order[v]));
                for (i = 0; i < columns; i++) out->gamma[columns * s + i] = cplx_fma(out->gamma[columns * s + i], t, b[(from->first + v) * columns + i]);
            }
        }
    }
    if (edges) add_edges_back(r, list, count, kappa, two, b, columns, out->gamma);
    if (r->flux && !two && (barrels & 1)) {
        const scatterer *own = &list[count - 1];
        while (own->barrel != 0) own--;
        out->flux = flux_shape(r, b[own->first], b[own->first + 1], barrel_ratio, radius, kappa);
    }
}
