/*
** A closed-form ladder. Between two planes (signal layers without plane count as dielectric) the barrel is a uniform line:
**
**     series  jw mu0 h/(2 pi rho),  rho = kappa a (K1 + Q I1)/(K0 - Q I0)(kappa a), mode 0 of the plate pair
**     shunt   C = 2 pi eps0 sqrt(eps_rho eps_z) h'/ln((R + delta)/a),  h' = h sqrt(eps_rho/eps_z),
**             delta = (ln 2/pi) h'/(1 + 2.17 t'/h')
**
** delta: how far the field reaches past the rim of an antipad; exact for thin planes, the 2.17 fitted to static cells.
** A plane of thickness t is a piece of coaxial line of the same cell. A pad widens the barrel over its thickness and a
** little beyond; what is left of the open end is a capacitance.
*/
#include "model/ladder.h"
#include "model/cavity_model.h"
#include "num/bessel.h"
#include "num/elliptic.h"

#ifndef LADDER_FITTED
/* Fitted to cells of the rigorous model. */
#define PAD_REACH  -0.14    /* height that a pad adds on each side, of its gap to the antipad ...                      */
#define PAD_WIDE    1.24    /* ... and more the wider it is, times (r_pad - a)/(R - a)                                 */
#define END_PAD    -0.38    /* the same two for the pad at the end                                                     */
#define END_WIDE    1.56
#define END_SHARE   0.84    /* of the capacitance with the TEM field held: what an opening to air has                  */
#define FREE_PAD    0.70    /* capacitance of a pad on a layer without plane, in 2 pi eps (r_pad - a)                  */
#define TIP_AIR    -0.15    /* of its radius: how much longer a barrel cut off in the dielectric looks ...             */
#define TIP_FILL    1.31    /* ... and what the fill adds, times its permittivity over the slab's                      */
#endif

typedef struct chain { cplx z; int open; } chain;       /* impedance looking down */

static void add_shunt(chain *c, cplx y)
{
    if (!c->open) y = cplx_add(y, cplx_inv(c->z));
    c->z = cplx_inv(y);
    c->open = 0;
}

static void add_line(chain *c, cplx series, cplx shunt)
{
    cplx gamma = cplx_sqrt(cplx_mul(series, shunt)), z0, e, t, one = cplx_of(1.0, 0.0);

    if (cplx_norm(gamma) == 0.0) return;
    z0 = cplx_div(gamma, shunt);
    e = cplx_exp(cplx_scale(gamma, -2.0));
    t = cplx_div(cplx_sub(one, e), cplx_add(one, e));          /* tanh */
    if (c->open) c->z = cplx_div(z0, t);
    else c->z = cplx_mul(z0, cplx_div(cplx_fma(c->z, z0, t), cplx_fma(z0, c->z, t)));
    c->open = 0;
}

static cplx radial(const lstub__cav_barrel *b, cplx eps, double k0)
{
    cplx kappa = cplx_sqrt(eps), q = cplx_of(0.0, 0.0), za;
    lstub__zik a, g;

    kappa = cplx_of(-k0 * kappa.im, k0 * kappa.re);
    za = cplx_scale(kappa, b->radius);
    lstub__bessel_zik(za, &a);
    if (b->outer == LSTUB__CAV_WALL) {
        lstub__bessel_zik(cplx_scale(kappa, b->wall), &g);
        q = cplx_mul(cplx_div(g.k0, g.i0), cplx_exp(cplx_scale(kappa, -2.0 * (b->wall - b->radius))));
    } else if (b->outer == LSTUB__CAV_RING) {
        q = cplx_mul(cplx_neg(lstub__cavity_answer(&b->returns, 0.0, 0.0, kappa)), cplx_exp(cplx_scale(za, 2.0)));
    }
    return cplx_mul(za, cplx_div(cplx_fma(a.k1, q, a.i1), cplx_fms(a.k0, q, a.i0)));
}

/* Opening of a plane to air, the field held at 1/rho. */
static double opening(double r, double outer)
{
    double m[3], k, e, l = log(outer / r), x[3][2] = { { r, r }, { r, outer }, { outer, outer } };
    int i;

    for (i = 0; i < 3; i++) {
        double s = x[i][0] + x[i][1], d = x[i][0] - x[i][1];
        lstub__elliptic((d / s) * (d / s) > 1e-300 ? (d / s) * (d / s) : 1e-300, &k, &e);
        m[i] = 2.0 / LSTUB_PI * s * e;
    }
    return (2.0 * m[1] - m[0] - m[2]) / (l * l);        /* times 2 pi eps */
}

static double spacing(const lstub__cav_barrel *b, int from, int *to)      /* dielectric from copper[from] to the next plane */
{
    double h = 0.0;
    int k = from;

    do {
        h += b->layer[k].thickness;
        k++;
        if (k <= b->layers && b->copper[k].antipad == 0.0) h += b->copper[k].thickness;
    } while (k < b->layers && b->copper[k].antipad == 0.0);
    *to = k;
    return h;
}

#define WIDE_PAD 0.5        /* of the way from barrel to antipad: where the pads' constants stop being good */

int lstub__ladder_valid(const lstub__cav_barrel *b)
{
    double length = 0.0;
    int k = 0, next;

    if (b->end > 0.0) return 0;
    while (k < b->layers) {
        double h = spacing(b, k, &next);
        const lstub__cav_copper *c = &b->copper[next];
        if (h > 0.35e-3 || (c->antipad > 0.0 && c->pad - b->radius > WIDE_PAD * (c->antipad - b->radius))) return 0;
        length += h + c->thickness;
        k = next;
    }
    return length > 0.5e-3;
}

cplx lstub__ladder_zin(const lstub__cav_barrel *b, double freq, const cplx *eps)
{
    double w = 2.0 * LSTUB_PI * freq, a = b->radius, top[CAV_SLABS];
    cplx jw = cplx_of(0.0, w);
    chain c;
    int first[CAV_SLABS], n = 0, k = 0, i, next = 0;
    double z = 0.0;

    while (k < b->layers && n < CAV_SLABS) { first[n] = k; top[n++] = z; z += spacing(b, k, &next) + b->copper[next].thickness; k = next; }
    c.z = cplx_of(0.0, 0.0);
    c.open = 1;
    for (i = n - 1; i >= 0; i--) {
        const lstub__cav_copper *upper, *lower;
        double h = spacing(b, first[i], &next), t, r, ratio, hp, tp, delta, scale, wide, drilled = b->end > 0.0 ? b->end - top[i] : 1.0;
        cplx e, ez, y, zs;
        int m = b->layer[first[i]].medium, p;

        if (drilled <= 0.0) continue;
        upper = &b->copper[first[i]];
        lower = &b->copper[next];
        t = lower->thickness;
        r = lower->antipad > 0.0 ? lower->antipad : upper->antipad;
        if (upper->antipad > 0.0) r = 0.5 * (r + upper->antipad);
        ratio = b->medium[m].ratio;
        ez = eps[m];
        e = cplx_scale(ez, sqrt(ratio));
        hp = h * sqrt(ratio);
        tp = t * sqrt(ratio);
        delta = 0.22063560015 * hp / (1.0 + 2.17 * tp / hp);
        wide = log((r + delta) / a);
        scale = 2.0 * LSTUB_PI * LSTUB_EPS0;
        if (drilled < h) {                              /* ends in this cavity */
            double l = drilled + a * (TIP_AIR + TIP_FILL * b->medium[b->fill].dk / (b->medium[m].dk * ratio));
            h = l < h ? l : h;
            hp = h * sqrt(ratio);
        } else if (lower->antipad > 0.0) {              /* the plane, its pad, the end */
            int last = next == b->layers && b->end <= 0.0;
            double rp = lower->pad > a ? lower->pad : a;
            cplx fill = cplx_scale(eps[lower->medium], b->medium[lower->medium].ratio);
            if (last) add_shunt(&c, cplx_mul(jw, cplx_scale(eps[b->below_medium], scale * END_SHARE * opening(rp, lower->antipad))));
            add_line(&c, cplx_of(0.0, w * LSTUB_MU0 * t * log(lower->antipad / rp) / (2.0 * LSTUB_PI)),
                     cplx_mul(jw, cplx_scale(fill, scale * t / log((lower->antipad + (last ? 0.0 : delta)) / rp))));
            if (rp > a) {
                double w1 = (rp - a) / (lower->antipad - a), reach = (lower->antipad - rp)
                          * (last ? END_PAD + END_WIDE * w1 : PAD_REACH + PAD_WIDE * w1);
                if (reach > 0.5 * hp) reach = 0.5 * hp;
                if (reach < 0.0) reach = 0.0;
                add_shunt(&c, cplx_mul(jw, cplx_scale(e, scale * (last ? 1.0 : 2.0) * reach
                                                            * (1.0 / log((r + delta) / rp) - 1.0 / wide))));
            }
        }
        for (p = first[i] + 1; p <= next; p++)          /* pads on layers without plane */
            if (b->copper[p].antipad == 0.0 && b->copper[p].pad > a && b->end <= 0.0)
                add_shunt(&c, cplx_mul(jw, cplx_scale(e, scale * FREE_PAD * (b->copper[p].pad - a))));
        zs = cplx_div(cplx_of(0.0, w * LSTUB_MU0 * h / (2.0 * LSTUB_PI)), radial(b, ez, w / LSTUB_C0));
        y = cplx_mul(jw, cplx_scale(e, scale * hp / wide));
        add_line(&c, zs, y);
    }
    return c.z;
}
