/*
** From slabs and faces to a compiled model: modal sums once per kind of slab, the static shape of the field within each
** annulus, and everything packed into one block of memory.
*/
#include "model/cavity_model.h"
#include "num/dense.h"

#include <string.h>

#define Q_STEP 0.02        /* relative change of the fill's permittivity for its derivative */

typedef struct work {
    const lstub__cav_barrel *barrel;
    void *(*allocate)(void *, size_t);
    void  (*release)(void *, void *);
    void   *user;
    cav_mesh   *mesh;
    cav_face   *face;
    int         kind[CAV_SLABS];            /* of each slab: number of its modal sums                        */
    int         kinds;
    int         sample[CAV_SLABS];          /* a slab of that kind                                           */
    cav_series *series, *series_q;
    double     *combined;                   /* [kinds][2 points] rims of both faces in rising order          */
    int        *place;                      /* [kinds][2 points] where top's, then bottom's rims are in it   */
    int         rims[CAV_SLABS + 4];        /* of each face: number of its set of rims                       */
    int         rim_sets;
    cav_answer  answer[CAV_ANSWERS];
    int         answers;
    cav_region  region[CAV_REGIONS];
    int         regions;
    double      k_max;
} work;

#define WIDE (2 * LSTUB__CAV_POINTS)

static int all_slabs(const work *w) { return w->mesh->barrels * w->mesh->slabs; }

static void *get(const work *w, size_t bytes) { return w->allocate(w->user, bytes); }
static void put(const work *w, void *p) { if (p != NULL) w->release(w->user, p); }

/* ---- which slabs are alike ---------------------------------------------------------------------- */

static void number_rims(work *w)
{
    int f, g;

    w->rim_sets = 0;
    for (f = 0; f < w->mesh->faces; f++) {
        const cav_face *a = &w->face[f];
        w->rims[f] = -1;
        for (g = 0; g < f && w->rims[f] < 0; g++) {
            const cav_face *b = &w->face[g];
            if (a->points == b->points && a->refine == b->refine && a->shaped == b->shaped && a->plain == b->plain
                && memcmp(a->x, b->x, (size_t)a->points * sizeof a->x[0]) == 0) w->rims[f] = w->rims[g];
        }
        if (w->rims[f] < 0) w->rims[f] = w->rim_sets++;
    }
}

static int rims_of(const work *w, int face) { return face < 0 ? -1 : w->rims[face]; }

static int alike(const work *w, const cav_slab *a, const cav_slab *b)
{
    /* heights are differences of depths: equal to rounding */
    return fabs(a->h - b->h) <= 1e-13 * a->h + 1e-18 && a->r_in == b->r_in && a->r_out == b->r_out
        && (a->outer == LSTUB__CAV_WALL) == (b->outer == LSTUB__CAV_WALL) && a->medium == b->medium && a->fill == b->fill
        && rims_of(w, a->top) == rims_of(w, b->top) && rims_of(w, a->bottom) == rims_of(w, b->bottom);
}

static void number_slabs(work *w)
{
    int i, k;

    w->kinds = 0;
    for (i = 0; i < all_slabs(w); i++) {
        const cav_slab *s = &w->mesh->slab[i];
        for (k = 0; k < w->kinds; k++) if (alike(w, s, &w->mesh->slab[w->sample[k]])) break;
        if (k == w->kinds) w->sample[w->kinds++] = i;
        else w->mesh->slab[i].h = w->mesh->slab[w->sample[k]].h;
        w->kind[i] = k;
    }
}

/* ---- modal sums --------------------------------------------------------------------------------- */

static int combine(const work *w, const cav_slab *s, double *x, int *place)
{
    const cav_face *a = &w->face[s->top], *b = s->bottom >= 0 ? &w->face[s->bottom] : NULL;
    int i = 0, j = 0, n = 0, nb;

    if (b == NULL || w->rims[s->top] == w->rims[s->bottom]) {
        for (i = 0; i < a->points; i++) { x[i] = a->x[i]; place[i] = place[LSTUB__CAV_POINTS + i] = i; }
        return a->points;
    }
    nb = b->points;
    while (i < a->points || j < nb) {
        int from_a = j == nb || (i < a->points && a->x[i] <= b->x[j]);
        double value = from_a ? a->x[i] : b->x[j];
        if (n == 0 || value > x[n - 1]) x[n++] = value;     /* a rim on both faces counts once */
        if (from_a) place[i++] = n - 1; else place[LSTUB__CAV_POINTS + j++] = n - 1;
    }
    return n;
}

static double *series_memory(const work *w, cav_series *s, int points)
{
    size_t block;

    s->points = points;
    s->pairs = points * (points + 1) / 2;
    block = (size_t)s->pairs * (size_t)(s->degree + 1);
    s->even = get(w, (2 * block + 2 * (size_t)s->pairs) * sizeof *s->even);
    if (s->even == NULL) return NULL;
    s->odd = s->even + block;
    s->low_even = s->odd + block;
    s->low_odd = s->low_even + s->pairs;
    return s->even;
}

static int sum_modes(work *w)
{
    double log_x[WIDE], *scratch = get(w, cav_modes_scratch(WIDE) * sizeof *scratch);
    int k, p;

    if (scratch == NULL) return -1;
    for (k = 0; k < w->kinds; k++) {
        const cav_slab *s = &w->mesh->slab[w->sample[k]];
        const lstub__cav_medium *m = &w->barrel->medium[s->medium];
        double *x = w->combined + (size_t)k * WIDE, q = s->fill >= 0 ? w->barrel->medium[s->fill].dk / m->dk : 1.0;
        int points = combine(w, s, x, w->place + (size_t)k * WIDE);

        for (p = 0; p < points; p++) log_x[p] = log(x[p]);
        cav_modes_plan(s, m->ratio, 1.2 * m->dk * w->k_max * w->k_max, &w->series[k]);
        if (series_memory(w, &w->series[k], points) == NULL) { put(w, scratch); return -1; }
        cav_modes_sum(s, m->ratio, q, x, log_x, points, &w->series[k], scratch);
        if (s->fill < 0) continue;
        w->series_q[k] = w->series[k];
        if (series_memory(w, &w->series_q[k], points) == NULL) { put(w, scratch); return -1; }
        cav_modes_sum(s, m->ratio, q * (1.0 + Q_STEP), x, log_x, points, &w->series_q[k], scratch);
    }
    put(w, scratch);
    return 0;
}

/* ---- static shapes ------------------------------------------------------------------------------ */

/* All modes n >= 1 at frequency 0: where the series begin depends on the band, the static field does not. */
static double at_zero(const cav_series *s, const double *series, int pair)
{
    double sum = series == s->odd ? s->low_odd[pair] : s->low_even[pair];
    int k;

    for (k = 0; k <= s->degree; k++) sum += (k & 1 ? -1.0 : 1.0) * series[k * s->pairs + pair];
    return sum;
}

static int pair_of(int p, int q) { return p <= q ? q * (q + 1) / 2 + p : p * (p + 1) / 2 + q; }

/* Static admittances of the annuli of `face` into a slab whose other face is shorted, or, twin, carries the same field. */
static void add_side(const work *w, int slab, int face, int twin, double *b, double *f)
{
    const cav_slab *s = &w->mesh->slab[slab];
    const cav_face *own = &w->face[face];
    const cav_series *e = &w->series[w->kind[slab]];
    int n = own->points - 1, i, j, points = own->points;
    const int *place = w->place + (size_t)w->kind[slab] * WIDE + (s->top == face ? 0 : LSTUB__CAV_POINTS);
    double scale = w->barrel->medium[s->medium].dk / s->h;

    for (i = 0; i < points; i++) {
        for (j = 0; j <= i; j++) {
            int pair = pair_of(place[i], place[j]);
            f[i * points + j] = f[j * points + i] = scale * (twin ? 4.0 * at_zero(e, e->odd, pair) : at_zero(e, e->odd, pair) + at_zero(e, e->even, pair));
        }
    }
    for (i = 0; i < n; i++) {
        for (j = 0; j < n; j++) {
            double d = f[(i + 1) * points + j + 1] - f[(i + 1) * points + j] - f[i * points + j + 1] + f[i * points + j];
            b[i * n + j] += d / ((own->log_x[i + 1] - own->log_x[i]) * (own->log_x[j + 1] - own->log_x[j]));
        }
    }
}

static void add_half_space(const work *w, const cav_face *face, double *b)
{
    double c[2 * LSTUB__CAV_POINTS], out[4 * LSTUB__CAV_POINTS * LSTUB__CAV_POINTS];
    cav_face fine = *face;
    int n = face->points - 1, i;

    fine.cells = n;
    fine.refine = 1;
    for (i = 0; i < n; i++) {
        c[2 * i + 1] = 1.0 / (face->log_x[i + 1] - face->log_x[i]);
        c[2 * i] = -c[2 * i + 1];
    }
    cav_half_space(&fine, c, out);
    for (i = 0; i < n * n; i++) b[i] += w->barrel->medium[w->barrel->below_medium].dk * out[i];
}

/*
** The static field of a face between two slabs (second -1: a half-space), its neighbours shorted: B v = lambda 1, sum v = 1.
** `copper`: slab of a copper layer whose two faces, `face` and `other`, carry the same field. Only the shape within a cell is
** used: how the field rises towards a rim.
*/
static void shape_face(const work *w, int face, int first, int copper, int other, int second)
{
    double b[(LSTUB__CAV_POINTS - 1) * (LSTUB__CAV_POINTS - 1)], v[LSTUB__CAV_POINTS], sum = 0.0, total;
    double f[LSTUB__CAV_POINTS * LSTUB__CAV_POINTS];
    cav_face *a = &w->face[face];
    int n = a->points - 1, i, k, first_face = face, second_face = other;

    if (a->refine == 1 || a->shaped == 0) return;
    memset(b, 0, sizeof b);
    /* alike from above and below must come out alike to the last bit: sum in the order of kinds */
    if (second >= 0 && w->kind[second] < w->kind[first]) {
        i = first; first = second; second = i;
        first_face = other; second_face = face;
    }
    add_side(w, first, first_face, 0, b, f);
    if (second >= 0) add_side(w, second, second_face, 0, b, f);
    else add_half_space(w, a, b);
    if (copper >= 0) add_side(w, copper, face, 1, b, f);
    for (i = 0; i < n; i++) v[i] = 1.0;
    if (lstub__rsolve(b, n, n, v, 1, 1) != 0) return;       /* keeps the plain 1/rho */
    for (i = 0; i < n; i++) sum += v[i];
    total = a->log_x[n] - a->log_x[0];
    for (i = 0; i < a->shaped * a->refine; i++) {
        double least = 0.1 * (a->log_x[i + 1] - a->log_x[i]) / total, value = v[i] / sum;
        a->share[i] = value > least ? value : least;        /* NaN: least */
    }
    for (i = 0; i < a->shaped * a->refine; i += a->refine) {
        for (sum = 0.0, k = 0; k < a->refine; k++) sum += a->share[i + k];
        for (k = 0; k < a->refine; k++) {
            double plain = (a->log_x[i + k + 1] - a->log_x[i + k]) / (a->log_x[i + a->refine] - a->log_x[i]);
            a->share[i + k] = a->plain * plain + (1.0 - a->plain) * a->share[i + k] / sum;
        }
    }
}

/* A face and, where the copper layer below it has the same rims, that layer's lower face: both take one shape, so that a thin
** layer can pass the field on as it is. Slab `above` is -1 under a half-space. Returns the slab above the next face. */
static int shape_next(const work *w, int face, int above, int below, int end)
{
    const cav_mesh *mesh = w->mesh;
    int other = below >= 0 && mesh->slab[below].copper ? mesh->slab[below].bottom : -1, after = below + 1 < end ? below + 1 : -1;

    if (other < 0 || w->rims[other] != w->rims[face] || (above < 0 && after < 0)) {
        if (above < 0) shape_face(w, face, below, -1, face, -1);
        else shape_face(w, face, above, -1, face, below);
        return below;
    }
    if (above < 0) shape_face(w, other, after, below, other, -1);
    else shape_face(w, face, above, below, other, after);
    if (above < 0) {
        w->face[face].plain = w->face[other].plain;
        memcpy(w->face[face].share, w->face[other].share, sizeof w->face[face].share);
    } else {
        w->face[other].plain = w->face[face].plain;
        memcpy(w->face[other].share, w->face[face].share, sizeof w->face[face].share);
    }
    return after;
}

static void shape_faces(const work *w)
{
    const cav_mesh *mesh = w->mesh;
    int b, i;

    for (b = 0; b < mesh->barrels; b++) {
        int start = b * mesh->slabs, end = start + mesh->slabs;

        i = start;
        if (mesh->feed > 0) {
            shape_face(w, mesh->first_face[b], start + CAV_FEED - 1, -1, mesh->first_face[b], start + CAV_FEED);
            i = start + CAV_FEED;
        } else if (mesh->open_top) {
            i = shape_next(w, mesh->first_face[b], -1, start, end);
        }
        while (i >= 0 && i < end) {
            const cav_slab *s = &mesh->slab[i];
            int face = i == start && mesh->feed == 0 && !mesh->open_top ? s->top : s->bottom;    /* a lid's slab is turned over */
            if (face < 0) break;
            i = shape_next(w, face, i, i + 1 < end ? i + 1 : -1, end);
        }
    }
}

void cav_cell_coefficients(const cav_face *face, double *c)
{
    int r = face->refine, i, k;

    for (i = 0; i < face->cells; i++) {
        double before = 0.0;
        for (k = 0; k <= r; k++) {
            int at = i * r + k;
            double s = k < r ? face->share[at] / (face->log_x[at + 1] - face->log_x[at]) : 0.0;
            *c++ = before - s;
            before = s;
        }
    }
}

/* ---- packing ------------------------------------------------------------------------------------ */

typedef struct pack { char *base; size_t at; } pack;        /* base null: only counts */

static void *take(pack *p, size_t bytes)
{
    void *out = p->base != NULL ? p->base + p->at : NULL;

    p->at += (bytes + 15) & ~(size_t)15;
    return out;
}

/* Sum over the rims of cell i of one face and cell j of the other. */
static double reaction(const double *series, const int *pi, const double *ci, int ri, const int *pj, const double *cj,
                       int rj)
{
    double sum = 0.0;
    int p, q;

    for (p = 0; p <= ri; p++) {
        double part = 0.0;
        for (q = 0; q <= rj; q++) part += cj[q] * series[pair_of(pi[p], pj[q])];
        sum += ci[p] * part;
    }
    return sum;
}

/* One coefficient's worth of a kernel. Alike: even, odd triangles. Otherwise top and bottom triangles, cross block. */
static void contract(const cav_series *s, int k, const int *place, const cav_opening *a, const cav_opening *b, int same,
                     double *out)
{
    const double *even = s->even + (size_t)k * (size_t)s->pairs, *odd = s->odd + (size_t)k * (size_t)s->pairs;
    int i, j, pass;

    for (pass = 0; pass < 2; pass++) {
        const cav_opening *o = same || pass == 0 ? a : b;
        const int *at = same || pass == 0 ? place : place + LSTUB__CAV_POINTS;
        int r;
        if (o == NULL) break;
        r = o->refine;
        for (i = 0; i < o->cells; i++) {
            for (j = 0; j <= i; j++) {
                const double *ci = o->c + i * (r + 1), *cj = o->c + j * (r + 1);
                double e = reaction(same && pass ? odd : even, at + i * r, ci, r, at + j * r, cj, r);
                if (!same) e += reaction(odd, at + i * r, ci, r, at + j * r, cj, r);
                *out++ = e;
            }
        }
    }
    if (same || b == NULL) return;
    for (i = 0; i < a->cells; i++) {
        for (j = 0; j < b->cells; j++) {
            const double *ci = a->c + i * (a->refine + 1), *cj = b->c + j * (b->refine + 1);
            const int *pi = place + i * a->refine, *pj = place + LSTUB__CAV_POINTS + j * b->refine;
            *out++ = reaction(even, pi, ci, a->refine, pj, cj, b->refine)
                   - reaction(odd, pi, ci, a->refine, pj, cj, b->refine);
        }
    }
}

/* Chebyshev terms that matter: what is dropped is below 1e-14 of the first. */
static int shorten(const double *coef, int degree, int entries)
{
    double most = 0.0;
    int e;

    for (e = 0; e < entries; e++) if (fabs(coef[e]) > most) most = fabs(coef[e]);
    for (; degree > 1; degree--) {
        for (e = 0; e < entries; e++) if (fabs(coef[degree * entries + e]) > 1e-14 * most) return degree;
    }
    return degree;
}

static int entries_of(int same, int na, int nb)
{
    return same ? na * (na + 1) : na * (na + 1) / 2 + nb * (nb + 1) / 2 + na * nb;
}

typedef struct plan {               /* numbering of what the model holds */
    int opening[CAV_SLABS + 4];     /* of each face                      */
    int first_face[CAV_SLABS + 4];  /* of each opening                   */
    int openings;
    int kernel[CAV_SLABS];          /* of each slab                      */
    int first_slab[CAV_SLABS];      /* of each kernel                    */
    int kernels;
} plan;

static void number_openings(const work *w, plan *n)
{
    int f, g, i, k;

    n->openings = 0;
    for (f = 0; f < w->mesh->faces; f++) {
        const cav_face *a = &w->face[f];
        for (g = 0; g < n->openings; g++) {
            const cav_face *b = &w->face[n->first_face[g]];
            if (w->rims[f] == w->rims[n->first_face[g]] && memcmp(a->share, b->share, (size_t)(a->points - 1) * sizeof(double)) == 0)
                break;
        }
        if (g == n->openings) n->first_face[n->openings++] = f;
        n->opening[f] = g;
    }
    n->kernels = 0;
    for (i = 0; i < all_slabs(w); i++) {
        const cav_slab *s = &w->mesh->slab[i];
        for (k = 0; k < n->kernels; k++) {
            const cav_slab *t = &w->mesh->slab[n->first_slab[k]];
            if (w->kind[i] == w->kind[n->first_slab[k]] && n->opening[s->top] == n->opening[t->top]
                && (s->bottom < 0 ? -1 : n->opening[s->bottom]) == (t->bottom < 0 ? -1 : n->opening[t->bottom])) break;
        }
        if (k == n->kernels) n->first_slab[n->kernels++] = i;
        n->kernel[i] = k;
    }
}

static void pack_openings(const work *w, const plan *n, pack *p, cav_opening *list)
{
    int g, i, a, b;

    for (g = 0; g < n->openings; g++) {
        const cav_face *f = &w->face[n->first_face[g]];
        size_t points = (size_t)f->points, cells = (size_t)f->cells;
        double *x = take(p, points * sizeof *x), *log_x = take(p, points * sizeof *x);
        double *c = take(p, cells * (size_t)(f->refine + 1) * sizeof *c), *self = take(p, cells * sizeof *self);

        if (list == NULL) continue;
        memcpy(x, f->x, points * sizeof *x);
        memcpy(log_x, f->log_x, points * sizeof *x);
        cav_cell_coefficients(f, c);
        for (i = 0; i < f->cells; i++) {
            const double *ci = c + i * (f->refine + 1);
            double sum = 0.0;
            for (a = 0; a <= f->refine; a++)
                for (b = 0; b <= f->refine; b++)    /* measured from the cell's first rim: smaller numbers */
                    sum += ci[a] * ci[b] * (log_x[i * f->refine + (a < b ? a : b)] - log_x[i * f->refine]);
            self[i] = sum;
        }
        list[g].points = f->points; list[g].cells = f->cells; list[g].refine = f->refine;
        list[g].same_rims = w->rims[n->first_face[g]];
        list[g].x = x; list[g].log_x = log_x; list[g].c = c; list[g].log_self = self;
    }
}

static void pack_kernels(const work *w, const plan *n, pack *p, const cav_opening *openings, cav_kernel *list)
{
    int k, d, e;

    for (k = 0; k < n->kernels; k++) {
        const cav_slab *s = &w->mesh->slab[n->first_slab[k]];
        int kind = w->kind[n->first_slab[k]], top = n->opening[s->top], bottom = s->bottom < 0 ? -1 : n->opening[s->bottom];
        const cav_series *series = &w->series[kind];
        int na = w->face[s->top].cells, nb = s->bottom < 0 ? 0 : w->face[s->bottom].cells;
        int same = top == bottom, entries = entries_of(same, na, nb), degree = series->degree;
        size_t count = (size_t)entries * (size_t)(degree + 1);
        double *coef = take(p, count * sizeof *coef), *coef_q = s->fill >= 0 ? take(p, count * sizeof *coef) : NULL;
        const int *place = w->place + (size_t)kind * WIDE;
        double q = s->fill >= 0 ? w->barrel->medium[s->fill].dk / w->barrel->medium[s->medium].dk : 1.0;

        if (list == NULL) continue;
        for (d = 0; d <= degree; d++) {
            const cav_opening *b = bottom < 0 ? NULL : &openings[bottom];
            contract(series, d, place, &openings[top], b, same, coef + d * entries);
            if (coef_q == NULL) continue;
            contract(&w->series_q[kind], d, place, &openings[top], b, same, coef_q + d * entries);
            for (e = d * entries; e < (d + 1) * entries; e++) coef_q[e] = (coef_q[e] - coef[e]) / (Q_STEP * q);
        }
        list[k].same = same; list[k].degree = shorten(coef, degree, entries); list[k].first = series->first;
        list[k].entries = entries; list[k].u_max = series->u_max; list[k].q = q;
        list[k].coef = coef; list[k].coef_q = coef_q;
    }
}

/* Slabs whose waves are answered alike: by the same vias, with or without the barrel itself, in the same dielectric. */
static int number_answers(cav_mesh *mesh, cav_answer *list)
{
    int count = 0, i, k;

    for (i = 0; i < mesh->barrels * mesh->slabs; i++) {
        cav_slab *s = &mesh->slab[i % mesh->slabs], *own = &mesh->slab[i];
        int barrels = (s->r_in > 0.0 ? 1 : 0) | (mesh->barrels > 1 && mesh->slab[i % mesh->slabs + mesh->slabs].r_in > 0.0 ? 2 : 0);

        own->answer = -1;
        if (own->outer != LSTUB__CAV_RING) continue;
        for (k = 0; k < count; k++) if (list[k].vias == own->vias && list[k].barrels == barrels && list[k].medium == own->medium) break;
        if (k == CAV_ANSWERS) return -2;
        if (k == count) {
            list[count].vias = own->vias;
            list[count].barrels = barrels;
            list[count++].medium = own->medium;
        }
        own->answer = k;
    }
    return count;
}

/* Distances from a depth to the nearest planes above and below; INFINITY: none. */
static void planes_around(const lstub__cav_barrel *barrel, double depth, double *up, double *down)
{
    double z = 0.0;
    int k;

    *up = *down = INFINITY;
    for (k = 0; k <= barrel->layers; k++) {
        const lstub__cav_copper *c = &barrel->copper[k];
        double top, bottom;
        if (k > 0) z += barrel->layer[k - 1].thickness;
        top = z;
        if (k > 0 || barrel->top == LSTUB__CAV_FREE) z += c->thickness;
        bottom = z;
        if (c->antipad <= 0.0) continue;
        if (bottom <= depth) *up = depth - bottom;
        else if (top >= depth && *down == INFINITY) *down = top - depth;
    }
}

/* The spaces between planes in which a trace leaves. -2: one has too many slabs. */
static int find_regions(work *w)
{
    cav_mesh *mesh = w->mesh;
    int i = mesh->feed, b, k, j;

    w->regions = 0;
    for (k = 0; k < mesh->barrels * mesh->slabs; k++) mesh->slab[k].region = -1;
    while (i < mesh->slabs) {
        const cav_slab *s = mesh->slab;
        cav_region r;
        int traces = 0, free_top = i == 0 && mesh->feed == 0, open_end;
        if (s[i].metal_wall >= 0) { i++; continue; }
        for (j = i; j < mesh->slabs && s[j].metal_wall < 0; j++) if (s[j].plane) { j++; break; }
        open_end = j == mesh->slabs && !s[j - 1].plane;
        r.first = r.ref = i;
        r.last = j - 1;
        r.height = free_top || open_end ? INFINITY : 0.0;
        r.reach = 0.0;
        for (b = 0; b < mesh->barrels; b++) {
            if (free_top && mesh->cap_tap[b] >= 0) traces = 1;
            for (k = i; k < j; k++) {
                const cav_slab *t = &s[b * mesh->slabs + k];
                if (b == 0) r.height += t->h;
                if (t->tap >= 0) { if (!traces && b == 0) r.ref = k; traces = 1; }
                if (t->top >= 0) r.reach = fmax(r.reach, w->face[t->top].x[w->face[t->top].points - 1]);
                if (t->bottom >= 0) r.reach = fmax(r.reach, w->face[t->bottom].x[w->face[t->bottom].points - 1]);
            }
        }
        if (traces) {
            if (free_top && s[0].metal_wall < 0 && mesh->first_face[0] < 0) { i = j; continue; }   /* under a lid: as it is */
            if (j - i > CAV_SHARED || w->regions == CAV_REGIONS) return -2;
            for (b = 0; b < mesh->barrels; b++) for (k = i; k < j; k++) mesh->slab[b * mesh->slabs + k].region = w->regions;
            w->region[w->regions++] = r;
        }
        i = j;
    }
    return 0;
}

static void find_taps(const work *w, lstub__cavity *m)
{
    const cav_mesh *mesh = w->mesh;
    int b, i, k;

    for (b = 0; b < mesh->barrels; b++) {
        const double *depth = b == 0 ? w->barrel->tap : w->barrel->partner->tap;
        for (i = 0; i < m->taps[b]; i++) {
            cav_tap *t = &m->tap[b][i];
            const cav_face *face;
            int slab = 0;
            for (k = 0; k < mesh->slabs; k++) if (mesh->slab[b * mesh->slabs + k].tap == i) slab = k;
            face = &w->face[m->cap_tap[b] != i ? mesh->slab[b * mesh->slabs + slab].bottom : mesh->open_top ? mesh->first_face[b] : mesh->slab[b * mesh->slabs].top];
            t->depth = depth[i];
            t->rim = face->x[0];
            t->region = mesh->slab[b * mesh->slabs + slab].region;
            planes_around(w->barrel, depth[i], &t->up, &t->down);
        }
    }
}

static void pack_model(const work *w, const plan *n, pack *p, lstub__cavity *m)
{
    const cav_mesh *mesh = w->mesh;
    cav_slab *slab;
    cav_opening *opening;
    cav_kernel *kernel;
    lstub__cav_via *via;
    double *half[4] = { NULL, NULL, NULL, NULL }, *plane_c;
    int half_face[4], planes = 0, i, b;        /* below each barrel, above each */

    half_face[0] = mesh->half_face[0];
    half_face[1] = mesh->barrels > 1 ? mesh->half_face[1] : -1;
    half_face[2] = mesh->open_top ? mesh->first_face[0] : -1;
    half_face[3] = mesh->open_top && mesh->barrels > 1 ? mesh->first_face[1] : -1;
    take(p, sizeof *m);
    slab = take(p, (size_t)all_slabs(w) * sizeof *slab);
    opening = take(p, (size_t)n->openings * sizeof *opening);
    kernel = take(p, (size_t)n->kernels * sizeof *kernel);
    via = take(p, (size_t)w->barrel->returns.vias * sizeof *via);
    for (i = 0; i < 4; i++) {
        size_t cells = half_face[i] >= 0 ? (size_t)w->face[half_face[i]].cells : 0;
        half[i] = take(p, 4 * cells * cells * sizeof *half[i]);
    }
    for (i = 0; i < mesh->slabs && w->barrel->returns.flux; i++) planes += mesh->slab[i].plane;
    plane_c = take(p, (size_t)planes * sizeof *plane_c);
    pack_openings(w, n, p, opening);
    pack_kernels(w, n, p, opening, kernel);
    if (m == NULL) return;
    for (i = 0; i < all_slabs(w); i++) {
        slab[i] = mesh->slab[i];
        slab[i].top = n->opening[slab[i].top];
        if (slab[i].bottom >= 0) slab[i].bottom = n->opening[slab[i].bottom];
        slab[i].kernel = n->kernel[i];
    }
    if (w->barrel->returns.vias > 0) memcpy(via, w->barrel->returns.via, (size_t)w->barrel->returns.vias * sizeof *via);
    for (i = 0; i < 4; i++)
        if (half_face[i] >= 0) cav_half_space(&w->face[half_face[i]], opening[n->opening[half_face[i]]].c, half[i]);
    m->barrels = mesh->barrels; m->slabs = mesh->slabs; m->openings = n->openings; m->kernels = n->kernels; m->media = w->barrel->media;
    m->feed = mesh->feed; m->lid_top = mesh->feed == 0 && !mesh->open_top;
    m->returns = w->barrel->returns; m->returns.via = via; m->outer = w->barrel->outer; m->rim_sets = w->rim_sets;
    for (b = 0; b < 2; b++) {
        const lstub__cav_cut *cut = b == 1 ? w->barrel->partner : NULL;
        m->taps[b] = b == 0 ? w->barrel->taps : cut != NULL ? cut->taps : 0;
        m->cap_tap[b] = b < mesh->barrels && mesh->feed == 0 ? mesh->cap_tap[b] : -1;
        m->half_opening[b] = half_face[b] >= 0 ? n->opening[half_face[b]] : -1;
        m->half[b] = half[b];
        m->half_top[b] = half[b + 2];
        m->cap_opening[b] = b >= mesh->barrels || mesh->feed > 0 ? -1 : n->opening[mesh->open_top ? mesh->first_face[b] : mesh->slab[b * mesh->slabs].top];
    }
    m->half_medium = w->barrel->below_medium;
    m->radius = w->barrel->radius;
    m->port_log = mesh->feed > 0 ? w->face[mesh->first_face[0] + 1].log_x[1] - w->face[mesh->first_face[0] + 1].log_x[0] : 0.0;
    m->port_medium = w->barrel->copper[0].medium;
    m->feed_length = mesh->feed_height * CAV_FEED;
    m->slab = slab; m->opening = opening; m->kernel = kernel;
    find_taps(w, m);
    m->regions = w->regions;
    memcpy(m->region, w->region, sizeof m->region);
    m->plane_c = plane_c;
    m->answers = w->answers;
    memcpy(m->answer, w->answer, sizeof m->answer);
    for (i = 0; i < m->media; i++) m->ratio[i] = w->barrel->medium[i].ratio;
}

static int build(work *w, lstub__cavity **out)
{
    plan n;
    pack p = { NULL, 0 };
    int failed;

    w->answers = number_answers(w->mesh, w->answer);
    if (w->answers < 0 || find_regions(w) != 0) return -2;
    number_rims(w);
    number_slabs(w);
    w->series = get(w, (size_t)w->kinds * sizeof *w->series);
    w->series_q = get(w, (size_t)w->kinds * sizeof *w->series_q);
    w->combined = get(w, (size_t)w->kinds * WIDE * sizeof *w->combined);
    w->place = get(w, (size_t)w->kinds * WIDE * sizeof *w->place);
    if (w->series != NULL) memset(w->series, 0, (size_t)w->kinds * sizeof *w->series);
    if (w->series_q != NULL) memset(w->series_q, 0, (size_t)w->kinds * sizeof *w->series_q);
    if (w->series == NULL || w->series_q == NULL || w->combined == NULL || w->place == NULL) return -1;
    failed = sum_modes(w);
    if (failed) return failed;
    shape_faces(w);
    number_openings(w, &n);
    pack_model(w, &n, &p, NULL);
    p.base = get(w, p.at);
    if (p.base == NULL) return -1;
    *out = (lstub__cavity *)(void *)p.base;
    (*out)->release = w->release;
    (*out)->user = w->user;
    p.at = 0;
    pack_model(w, &n, &p, *out);
    if (w->barrel->returns.flux) {
        void *scratch = get(w, cav_flux_scratch());
        failed = scratch == NULL ? -1 : cav_flux_prepare(*out, w->barrel->medium, scratch);
        put(w, scratch);
        if (failed) { lstub__cavity_destroy(*out); *out = NULL; }
    }
    return failed;
}

int lstub__cavity_compile(const lstub__cav_barrel *barrel, const lstub__cav_options *options,
                          void *(*allocate)(void *, size_t), void (*release)(void *, void *), void *user,
                          lstub__cavity **out)
{
    static const lstub__cav_options defaults = { 0, 0, 0.0 };
    const lstub__cav_options *o = options != NULL ? options : &defaults;
    int cells = o->cells > 0 ? o->cells : 4, refine = o->refine > 0 ? o->refine : 2, failed, k;
    work *w = allocate(user, sizeof *w);
    void *scratch = allocate(user, cav_mesh_scratch());

    *out = NULL;
    if (w != NULL) {
        memset(w, 0, sizeof *w);
        w->barrel = barrel; w->allocate = allocate; w->release = release; w->user = user;
        w->k_max = 2.0 * LSTUB_PI * (o->f_max > 0.0 ? o->f_max : 110e9) / LSTUB_C0;
        w->mesh = get(w, sizeof *w->mesh);
        w->face = get(w, (CAV_SLABS + 4) * sizeof *w->face);
    }
    failed = w == NULL || scratch == NULL || w->mesh == NULL || w->face == NULL ? -1 : 0;
    if (!failed && ((cells + 4) * refine + 1 > LSTUB__CAV_POINTS || cells + 6 > LSTUB__CAV_CELLS
                    || barrel->media > LSTUB__CAV_MEDIA || barrel->returns.vias > LSTUB__CAV_VIAS || (barrel->partner != NULL && 2 * (cells + 6) > LSTUB__CAV_CELLS))) failed = -2;
    if (!failed) {
        w->mesh->face = w->face;
        failed = cav_mesh_make(barrel, cells, refine, scratch, w->mesh);
    }
    if (!failed) failed = build(w, out);
    if (w != NULL) {
        for (k = 0; k < w->kinds && w->series != NULL && w->series_q != NULL; k++) {
            put(w, w->series[k].even);
            put(w, w->series_q[k].even);
        }
        put(w, w->series); put(w, w->series_q); put(w, w->combined); put(w, w->place);
        put(w, w->face); put(w, w->mesh);
        release(user, w);
    }
    if (scratch != NULL) release(user, scratch);
    return failed;
}

void lstub__cavity_destroy(lstub__cavity *cavity)
{
    if (cavity != NULL) cavity->release(cavity->user, cavity);
}
