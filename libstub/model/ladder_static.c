/*
** The static field of a barrel at one voltage, on the slabs and openings of cavity_mesh.c.
**
** An opening has annuli with E_rho = V_i/(rho l_i). The energy of all slabs,
**
**     sum of V_top' T V_top - 2 V_top' C V_bottom + V_bottom' B V_bottom ,
**
** is least for the true field; voltages across an opening of the barrel add up to 1, those across one below its end to
** whatever they like. It is solved block by block from the far end upwards.
*/
#include "model/ladder_parts.h"
#include "num/dense.h"

#include <string.h>

#define TERMS  6                    /* room of the series that cav_modes_sum fills: its tails take five ...   */
#define DEGREE 1                    /* ... and a mode this degree: over so short a span, a value and a slope  */
#define SPAN   1e-6                 /* of the first cut-off                                                   */

static double square(double x) { return x * x; }

/* ---- modes ---------------------------------------------------------------------------------------- */

static int same_rims(const ladder_work *w, int f, int g)
{
    const cav_face *a, *b;

    if (f == g || f < 0 || g < 0) return f == g;
    a = &w->face[f];
    b = &w->face[g];
    return a->points == b->points && memcmp(a->x, b->x, (size_t)a->points * sizeof a->x[0]) == 0;
}

static int alike(const ladder_work *w, const cav_slab *a, const cav_slab *b)
{
    return fabs(a->h - b->h) <= 1e-13 * a->h + 1e-18 && a->r_in == b->r_in && a->r_out == b->r_out
        && (a->outer == LSTUB__CAV_WALL) == (b->outer == LSTUB__CAV_WALL) && a->medium == b->medium && a->fill == b->fill
        && same_rims(w, a->top, b->top) && same_rims(w, a->bottom, b->bottom);
}

void ladder_number(ladder_work *w, int *sample)
{
    int i, k;

    w->kinds = 0;
    for (i = 0; i < w->mesh.slabs; i++) {
        for (k = 0; k < w->kinds && !alike(w, &w->mesh.slab[i], &w->mesh.slab[sample[k]]); k++) continue;
        if (k == w->kinds) sample[w->kinds++] = i;
        w->of[i] = k;
    }
}

static void combine(const ladder_work *w, const cav_slab *s, ladder_kind *k)
{
    const cav_face *a = &w->face[s->top], *b = s->bottom >= 0 ? &w->face[s->bottom] : NULL;
    int i = 0, j = 0, n = 0, nb = b != NULL ? b->points : 0;

    while (i < a->points || j < nb) {
        int upper = j == nb || (i < a->points && a->x[i] <= b->x[j]);
        double value = upper ? a->x[i] : b->x[j];

        if (n == 0 || value > k->x[n - 1]) { k->x[n] = value; k->log_x[n++] = log(value); }
        k->place[upper ? 0 : 1][upper ? i++ : j++] = n - 1;
    }
    k->points = n;
}

/* Value and slope at u = 0 of Chebyshev series on 0 .. u_max. */
static void at_zero(const cav_series *s, const double *series, double *value, double *slope)
{
    int p, d;

    for (p = 0; p < s->pairs; p++) {
        double v = 0.0, t = 0.0, sign = 1.0;
        for (d = 0; d < TERMS; d++, sign = -sign) {
            v += sign * series[d * s->pairs + p];
            t -= sign * d * d * series[d * s->pairs + p];
        }
        value[p] = v;
        slope[p] = 2.0 * t / s->u_max;
    }
}

/* Series of U = K0(a) I0(x) - I0(a) K0(x) and P = kappa a (K1(a) I0(x) + I1(a) K0(x)). */
ladder_wave ladder_wave_at(double a, double x)
{
    double aa = 0.25 * a * a, xx = 0.25 * x * x, l = log(x / a);
    ladder_wave v;

    v.l = l;
    v.u[0] = l * (xx + aa) + aa - xx;
    v.u[1] = l * (0.25 * (xx * xx + aa * aa) + aa * xx) + 0.375 * (aa * aa - xx * xx);
    v.p[0] = xx - aa * (1.0 + 2.0 * l);
    v.p[1] = 0.25 * xx * xx + aa * xx * (1.0 - 2.0 * l) - aa * aa * (l + 1.25);
    return v;
}

/* Integral of rho ln(x/rho) ln(y/rho) up to z <= x, y. */
static double below_barrel(double z, double x, double y)
{
    double a = log(x / z), b = log(y / z);
    return 0.5 * z * z * (a * b + 0.5 * (a + b) + 0.5);
}

/* What mode 0 adds between rims x <= y besides its loop, per eps, at frequency 0, and its slope in u = -kappa^2. */
static void mode_zero(const ladder_work *w, const cav_slab *s, double x, double y, double out[2])
{
    double a = s->r_in;

    if (a > 0.0) {
        ladder_wave low = ladder_wave_at(a, x), high = ladder_wave_at(a, y);
        out[0] = -low.u[0] - high.p[0] * low.l;
        out[1] = low.u[1] + high.p[1] * low.l + high.p[0] * low.u[0];
    } else {
        out[0] = below_barrel(x, x, y);
        out[1] = 0.0;
        if (s->fill >= 0) {
            double q = w->barrel->medium[s->fill].dk / w->barrel->medium[s->medium].dk, z = x < s->hole ? x : s->hole;
            out[0] += (q - 1.0) * below_barrel(z, x, y);
        }
    }
}

size_t ladder_sum_scratch(void)
{
    return (2 * LADDER_PAIRS * (TERMS + 1) + cav_modes_scratch(LADDER_RIMS)) * sizeof(double);
}

void ladder_sum(const ladder_work *w, ladder_kind *k, double *scratch)
{
    const cav_slab *s = &w->mesh.slab[k->slab];
    const lstub__cav_medium *m = &w->barrel->medium[s->medium];
    double q = s->fill >= 0 ? w->barrel->medium[s->fill].dk / m->dk : 1.0;
    cav_series e;
    size_t room;
    int i, j, p;

    combine(w, s, k);
    e.points = k->points;
    e.pairs = k->points * (k->points + 1) / 2;
    e.degree = DEGREE;
    e.first = 1;
    e.u_max = SPAN * square(LSTUB_PI / s->h) / m->ratio;
    room = (size_t)e.pairs * TERMS;
    e.even = scratch;
    e.odd = e.even + room;
    e.low_even = e.odd + room;
    e.low_odd = e.low_even + e.pairs;
    memset(scratch, 0, 2 * room * sizeof *scratch);
    cav_modes_sum(s, m->ratio, q, k->x, k->log_x, k->points, &e, e.low_odd + e.pairs);
    at_zero(&e, e.even, k->even[0], k->even[1]);
    at_zero(&e, e.odd, k->odd[0], k->odd[1]);
    for (i = 0, j = 0; j < k->points; j++)
        for (p = 0; p <= j; p++, i++) {         /* an even mode, too */
            double v[2];
            mode_zero(w, s, k->x[p], k->x[j], v);
            k->even[0][i] += v[0];
            k->even[1][i] += v[1];
        }
}

/* ---- blocks --------------------------------------------------------------------------------------- */

static const cav_face *side(const ladder_work *w, const cav_slab *s, int bottom) { return &w->face[bottom ? s->bottom : s->top]; }

/* Entry of the admittance per eps over rims at frequency 0, or (1) its slope in u. cross: between the faces. */
double ladder_entry(const ladder_work *w, const ladder_kind *k, int p, int q, int cross, int slope)
{
    int pair = p < q ? q * (q + 1) / 2 + p : p * (p + 1) / 2 + q;
    double odd = k->odd[slope][pair];

    return (k->even[slope][pair] + (cross ? -odd : odd)) / w->mesh.slab[k->slab].h;
}

/* Adds scale times the block of the annuli of two faces of a slab (0: top, 1: bottom). */
static void add_block(const ladder_work *w, int slab, int upper, int lower, double scale, double *out)
{
    const cav_slab *s = &w->mesh.slab[slab];
    const ladder_kind *k = &w->kind[w->of[slab]];
    const cav_face *a = side(w, s, upper), *b = side(w, s, lower);
    double f[(LADDER_MOST + 1) * (LADDER_MOST + 1)];
    int n = b->points, i, j;

    scale *= w->barrel->medium[s->medium].dk;
    for (i = 0; i < a->points; i++)
        for (j = 0; j < n; j++) f[i * n + j] = ladder_entry(w, k, k->place[upper][i], k->place[lower][j], upper != lower, 0);
    for (i = 0; i < a->points - 1; i++)
        for (j = 0; j < n - 1; j++) {
            double d = f[(i + 1) * n + j + 1] - f[(i + 1) * n + j] - f[i * n + j + 1] + f[i * n + j];
            out[i * (n - 1) + j] += scale * d / ((a->log_x[i + 1] - a->log_x[i]) * (b->log_x[j + 1] - b->log_x[j]));
        }
}

static void half_block(const ladder_work *w, const cav_face *face, double *out)
{
    double c[2 * LADDER_MOST], sums[4 * LADDER_MOST * LADDER_MOST];
    int n = face->cells, i;

    cav_cell_coefficients(face, c);
    cav_half_space(face, c, sums);
    for (i = 0; i < n * n; i++) out[i] += w->barrel->medium[w->barrel->below_medium].dk * sums[i];
}

/* The opening below slab `above`: from what is left of the energy below, m and right-hand side r, to its answer. */
static int settle(const ladder_work *w, int above, double *m, const double *r)
{
    const cav_slab *s = &w->mesh.slab[above];
    const cav_face *face = side(w, s, 1), *up = side(w, s, 0);
    ladder_joint *j = &w->joint[s->bottom];
    int n = face->cells, nu = up->cells, columns = nu + 2, i, k;
    double x[LADDER_MOST * (LADDER_MOST + 2)], c[LADDER_MOST * LADDER_MOST], sum[LADDER_MOST + 2];

    memset(c, 0, sizeof c);
    add_block(w, above, 0, 1, 1.0, c);
    for (i = 0; i < n; i++) {
        for (k = 0; k < nu; k++) x[i * columns + k] = c[k * n + i];
        x[i * columns + nu] = r[i];
        x[i * columns + nu + 1] = 1.0;
    }
    if (lstub__rsolve(m, n, n, x, columns, columns) != 0) return -2;
    for (k = 0; k < columns; k++) for (sum[k] = 0.0, i = 0; i < n; i++) sum[k] += x[i * columns + k];
    for (i = 0; i < n; i++) {
        double g = s->r_in > 0.0 ? x[i * columns + nu + 1] / sum[nu + 1] : 0.0;    /* of a conductor: 1 in all */
        for (k = 0; k < nu; k++) j->follow[i * nu + k] = x[i * columns + k] - g * sum[k];
        j->own[i] = x[i * columns + nu] + g * (1.0 - sum[nu]);
    }
    return 0;
}

/* From the far end upwards, then the voltages downwards. slab[0] is the feeding line. */
int ladder_solve(const ladder_work *w)
{
    const cav_mesh *mesh = &w->mesh;
    int i, k, l, last = mesh->slabs - 1;
    double m[LADDER_MOST * LADDER_MOST], r[LADDER_MOST], c[LADDER_MOST * LADDER_MOST];

    memset(m, 0, sizeof m);
    memset(r, 0, sizeof r);
    if (mesh->half_face[0] >= 0) half_block(w, &w->face[mesh->half_face[0]], m);
    else add_block(w, last--, 0, 0, 1.0, m);
    for (i = last; i >= 0; i--) {
        const cav_slab *s = &mesh->slab[i];
        const ladder_joint *j = &w->joint[s->bottom];
        int n = w->face[s->bottom].cells, nu = w->face[s->top].cells;

        add_block(w, i, 1, 1, 1.0, m);
        if (settle(w, i, m, r) != 0) return -2;
        if (i == 0) break;
        memset(m, 0, sizeof m);
        memset(r, 0, sizeof r);
        memset(c, 0, sizeof c);
        add_block(w, i, 0, 0, 1.0, m);
        add_block(w, i, 0, 1, 1.0, c);
        for (k = 0; k < nu; k++)
            for (l = 0; l < n; l++) {
                int q;
                r[k] += c[k * n + l] * j->own[l];
                for (q = 0; q < nu; q++) m[k * nu + q] -= c[k * n + l] * j->follow[l * nu + q];
            }
    }
    w->joint[mesh->slab[0].top].v[0] = 1.0;
    for (i = 0; i <= last; i++) {
        const cav_slab *s = &mesh->slab[i];
        const double *above = w->joint[s->top].v;
        ladder_joint *j = &w->joint[s->bottom];
        int n = w->face[s->bottom].cells, nu = w->face[s->top].cells;

        for (k = 0; k < n; k++)
            for (j->v[k] = j->own[k], l = 0; l < nu; l++) j->v[k] += j->follow[k * nu + l] * above[l];
    }
    return 0;
}
