/*
** From the static field (ladder_static.c) to a ladder: T, C, B of the shapes that the openings carry are three numbers a
** slab, their slopes in eps k0^2 three more. What hangs below the barrel's end is one capacitance.
*/
#include "model/ladder_parts.h"

#include <string.h>

typedef struct memory {
    void *(*allocate)(void *, size_t);
    void  (*release)(void *, void *);
    void   *user;
} memory;

static double square(double x) { return x * x; }

/* ---- what a slab is worth ------------------------------------------------------------------------- */

/* The shape of a face as coefficients on its rims. */
static int on_rims(const ladder_work *w, int face, double *c)
{
    const cav_face *f = &w->face[face];
    double before = 0.0;
    int i;

    for (i = 0; i < f->points; i++) {
        double now = i < f->cells ? w->joint[face].v[i] / (f->log_x[i + 1] - f->log_x[i]) : 0.0;
        c[i] = before - now;
        before = now;
    }
    return f->points;
}

/* Admittance of the shapes of two faces of a slab and its slope. */
static void worth(const ladder_work *w, int slab, int upper, int lower, double out[2])
{
    const cav_slab *s = &w->mesh.slab[slab];
    const ladder_kind *k = &w->kind[w->of[slab]];
    double a[LADDER_MOST + 1], b[LADDER_MOST + 1];
    int na = on_rims(w, upper ? s->bottom : s->top, a), nb = on_rims(w, lower ? s->bottom : s->top, b), i, j;

    out[0] = out[1] = 0.0;
    for (i = 0; i < na; i++)
        for (j = 0; j < nb; j++) {
            int e;
            for (e = 0; e < 2; e++) out[e] += a[i] * b[j] * ladder_entry(w, k, k->place[upper][i], k->place[lower][j], upper != lower, e);
        }
}

/* The voltage of mode 0 on a face is 1 + kappa^2 out[0] + kappa^4 out[1]. */
static void wave_part(const ladder_work *w, const cav_slab *s, int face, double out[2])
{
    double c[LADDER_MOST + 1];
    int n = on_rims(w, face, c), i;

    out[0] = out[1] = 0.0;
    for (i = 0; i < n; i++) {
        ladder_wave v = ladder_wave_at(s->r_in, w->face[face].x[i]);
        out[0] += c[i] * v.u[0];
        out[1] += c[i] * v.u[1];
    }
}

/* The loop that a slab's current takes; -1: it lies in an antipad, as coaxial as can be. */
static int loop_of(const ladder_work *w, const cav_slab *s, lstub__ladder *ladder)
{
    int i;

    if (s->outer == LSTUB__CAV_WALL && !(w->barrel->outer == LSTUB__CAV_WALL && s->r_out == w->barrel->wall)) return -1;
    for (i = 0; i < ladder->loops; i++)
        if (ladder->loop[i].medium == s->medium && ladder->loop[i].vias == s->vias) return i;
    if (i == LADDER_LOOPS) return -2;
    ladder->loop[i].medium = s->medium;
    ladder->loop[i].vias = s->vias;
    ladder->loops++;
    return i;
}

static int make_step(const ladder_work *w, int slab, lstub__ladder *ladder, ladder_step *p)
{
    const cav_slab *s = &w->mesh.slab[slab];
    ladder_wave v;

    worth(w, slab, 0, 0, p->t);
    worth(w, slab, 1, 1, p->b);
    worth(w, slab, 0, 1, p->c);
    wave_part(w, s, s->top, p->top);
    wave_part(w, s, s->bottom, p->bottom);
    p->h = s->h;
    p->medium = s->medium;
    p->loop = loop_of(w, s, ladder);
    p->log0 = -log(s->r_in / w->barrel->radius);    /* a pad is that much nearer to the wall */
    p->log1 = 0.0;
    if (p->loop == -1) {            /* U/P at the antipad's rim, to first order in kappa^2 = -u */
        v = ladder_wave_at(s->r_in, s->r_out);
        p->log0 = v.l;
        p->log1 = v.l * v.p[0] - v.u[0];
    }
    return p->loop == -2 ? -2 : 0;
}

static void add_end(lstub__ladder *ladder, ladder_end *end, int medium, int loop, const double c[3])
{
    int i, k;

    for (i = 0; i < ladder->ends && (end[i].medium != medium || end[i].loop != loop); i++) continue;
    if (i == ladder->ends) {
        end[i].medium = medium;
        end[i].loop = loop;
        ladder->ends++;
    }
    for (k = 0; k < 3; k++) end[i].c[k] += c[k];
}

/* Below the barrel, to order kappa^2: integral of mode 0's current up to x, per eps. */
static double inner_wave(const ladder_work *w, const cav_slab *s, double x)
{
    double q, r = s->hole;

    if (s->fill < 0) return 0.25 * x * x;
    q = w->barrel->medium[s->fill].dk / w->barrel->medium[s->medium].dk;
    return x < r ? 0.25 * q * x * x : 0.25 * x * x + (q - 1.0) * r * r * (0.25 + 0.5 * log(x / r));
}

/* What mode 0 adds there for the shapes of two faces, but for the wall's part, which is the product of *square of each. */
static double wave_worth(const ladder_work *w, const cav_slab *s, int upper, int lower, double *square)
{
    double a[LADDER_MOST + 1], b[LADDER_MOST + 1], sum = 0.0;
    int fa = upper ? s->bottom : s->top, fb = lower ? s->bottom : s->top, na = on_rims(w, fa, a), nb = on_rims(w, fb, b), i, j;

    for (*square = 0.0, i = 0; i < na; i++) {
        double x = w->face[fa].x[i], ix = inner_wave(w, s, x);
        *square += a[i] * ix;
        for (j = 0; j < nb; j++) {
            double y = w->face[fb].x[j], low = x < y ? ix : inner_wave(w, s, y), l = fabs(log(y / x));
            sum += a[i] * b[j] * (0.25 * low * low * (1.5 + l) + ix * inner_wave(w, s, y) * (log(x < y ? y : x) - 1.0));
        }
    }
    return sum;
}

/* What a slab below the barrel holds, at frequency 0 and its slope; c[2]: times 1/R of its loop. */
static int below_slab(const ladder_work *w, int slab, lstub__ladder *ladder, double c[3])
{
    const cav_slab *s = &w->mesh.slab[slab];
    int loop = loop_of(w, s, ladder);
    double v[2], qt, qb = 0.0;

    worth(w, slab, 0, 0, v);
    c[0] = v[0];
    c[1] = v[1] - wave_worth(w, s, 0, 0, &qt) / s->h;
    if (s->bottom >= 0) {
        worth(w, slab, 1, 1, v);
        c[0] += v[0];
        c[1] += v[1] - wave_worth(w, s, 1, 1, &qb) / s->h;
        worth(w, slab, 0, 1, v);
        c[0] -= 2.0 * v[0];
        c[1] -= 2.0 * (v[1] - wave_worth(w, s, 1, 0, &qb) / s->h);
    }
    c[2] = square(qt - qb) / s->h;
    c[1] += c[2] * log(loop >= 0 ? w->barrel->radius : s->r_out);
    if (loop == -1) c[2] = 0.0;
    return loop;
}

static int make_ends(const ladder_work *w, int first, lstub__ladder *ladder, ladder_end *end)
{
    const cav_mesh *mesh = &w->mesh;
    double c[3];
    int i, j, k;

    for (i = first; i < mesh->slabs; i++) {
        int loop = below_slab(w, i, ladder, c);
        if (loop == -2) return -2;
        add_end(ladder, end, mesh->slab[i].medium, loop, c);
    }
    if (mesh->half_face[0] >= 0) {
        const cav_face *f = &w->face[mesh->half_face[0]];
        const double *shape = w->joint[mesh->half_face[0]].v;
        double rim[2 * LADDER_MOST], sums[4 * LADDER_MOST * LADDER_MOST];

        cav_cell_coefficients(f, rim);
        cav_half_space(f, rim, sums);
        for (k = 0; k < 2; k++)
            for (c[k] = 0.0, i = 0; i < f->cells; i++)
                for (j = 0; j < f->cells; j++) c[k] += shape[i] * shape[j] * sums[(k * f->cells + i) * f->cells + j];
        c[2] = 0.0;
        add_end(ladder, end, w->barrel->below_medium, -1, c);
    }
    return 0;
}

/* What the first opening adds to the coaxial line above it. */
static double feed_of(const ladder_work *w)
{
    const cav_slab *s = &w->mesh.slab[0];
    double t[2], b[2], c[2];

    worth(w, 0, 0, 0, t);
    worth(w, 0, 1, 1, b);
    worth(w, 0, 0, 1, c);
    return t[0] + b[0] - 2.0 * c[0] - w->barrel->medium[s->medium].ratio * s->h / log(s->r_out / s->r_in);
}

static size_t rounded(size_t bytes) { return (bytes + 15) & ~(size_t)15; }

static int pack(const ladder_work *w, const memory *mem, lstub__ladder **out)
{
    const lstub__cav_barrel *b = w->barrel;
    const cav_mesh *mesh = &w->mesh;
    int steps = 0, failed = 0, i;
    size_t at_step = rounded(sizeof **out), at_end, at_via, bytes;
    lstub__ladder *l;
    ladder_step *step;
    ladder_end *end;
    lstub__cav_via *via;

    while (steps + 1 < mesh->slabs && mesh->slab[steps + 1].r_in > 0.0) steps++;
    at_end = at_step + rounded((size_t)steps * sizeof *step);
    at_via = at_end + rounded((size_t)(mesh->slabs - steps) * sizeof *end);
    bytes = at_via + (size_t)b->returns.vias * sizeof *via;
    l = mem->allocate(mem->user, bytes);
    if (l == NULL) return -1;
    memset(l, 0, bytes);
    step = (ladder_step *)(void *)((char *)l + at_step);
    end = (ladder_end *)(void *)((char *)l + at_end);
    via = (lstub__cav_via *)(void *)((char *)l + at_via);
    l->bytes = bytes; l->release = mem->release; l->user = mem->user;
    l->steps = steps; l->step = step; l->end = end;
    l->outer = b->outer; l->radius = b->radius; l->wall = b->wall;
    l->returns = b->returns;
    l->returns.via = via;
    if (b->returns.vias > 0) memcpy(via, b->returns.via, (size_t)b->returns.vias * sizeof *via);
    for (i = 0; i < steps && !failed; i++) failed = make_step(w, i + 1, l, &step[i]);
    if (!failed) failed = make_ends(w, steps + 1, l, end);
    l->feed = feed_of(w);
    l->feed_medium = mesh->slab[0].medium;
    if (failed) { mem->release(mem->user, l); return failed; }
    *out = l;
    return 0;
}

/* ---- all of it ------------------------------------------------------------------------------------ */

/* The feeding line as one slab, before the others, as long as its gap is wide: what the opening adds to it dies out in a third
** of that. */
static void one_feed(cav_mesh *mesh)
{
    mesh->slab[CAV_FEED - 1].h = 0.5 * CAV_FEED * mesh->feed_height;
    mesh->slab[CAV_FEED - 1].top = mesh->slab[0].top;
    mesh->slabs -= CAV_FEED - 1;
    memmove(&mesh->slab[0], &mesh->slab[CAV_FEED - 1], (size_t)mesh->slabs * sizeof mesh->slab[0]);
}

/* Below the second plane that a drilled barrel does not reach its field is not felt: there the board ends. */
static void cut_below(lstub__cav_barrel *b)
{
    double z = 0.0;
    int k, planes = 0;

    if (b->end <= 0.0) return;
    for (k = 0; k < b->layers; k++) {
        z += b->layer[k].thickness;
        if (z >= b->end && b->copper[k + 1].antipad > 0.0 && ++planes == 2) break;
        z += b->copper[k + 1].thickness;
    }
    if (k >= b->layers - 1) return;
    b->layers = k + 1;
    b->below = LSTUB__CAV_HALFSPACE;
    b->below_medium = b->layer[k + 1].medium;
}

static void *get(const memory *mem, size_t bytes) { return mem->allocate(mem->user, bytes); }
static void put(const memory *mem, void *p) { if (p != NULL) mem->release(mem->user, p); }

static int build(ladder_work *w, const memory *mem, lstub__ladder **out)
{
    double *scratch = NULL;
    int i, k, failed = 0, sample[CAV_SLABS];

    for (i = 0; i < w->mesh.faces; i++) if (w->face[i].cells > LADDER_MOST) return -2;
    ladder_number(w, sample);
    w->kind = get(mem, (size_t)w->kinds * sizeof *w->kind);
    w->joint = get(mem, (size_t)w->mesh.faces * sizeof *w->joint);
    scratch = get(mem, ladder_sum_scratch());
    if (w->kind == NULL || w->joint == NULL || scratch == NULL) failed = -1;
    for (k = 0; k < w->kinds && !failed; k++) {
        w->kind[k].slab = sample[k];
        ladder_sum(w, &w->kind[k], scratch);
    }
    if (!failed) failed = ladder_solve(w);
    if (!failed) failed = pack(w, mem, out);
    put(mem, scratch);
    put(mem, w->joint);
    put(mem, w->kind);
    return failed;
}

int lstub__ladder_make(const lstub__cav_barrel *barrel, void *(*allocate)(void *, size_t), void (*release)(void *, void *),
                       void *user, lstub__ladder **out)
{
    const memory mem = { allocate, release, user };
    lstub__cav_barrel stub = *barrel;
    ladder_work *w = get(&mem, sizeof *w);
    void *parts = get(&mem, cav_mesh_scratch());
    cav_face *face = get(&mem, (CAV_SLABS + 4) * sizeof *face);
    int failed = -1;

    *out = NULL;
    stub.taps = 0;
    stub.partner = NULL;
    cut_below(&stub);
    if (w != NULL && parts != NULL && face != NULL) {
        memset(w, 0, sizeof *w);
        w->barrel = &stub;
        w->face = w->mesh.face = face;
        failed = cav_mesh_make(&stub, LADDER_ANNULI, 1, parts, &w->mesh);
        if (!failed) {
            one_feed(&w->mesh);
            failed = build(w, &mem, out);
        }
    }
    put(&mem, face);
    put(&mem, parts);
    put(&mem, w);
    return failed;
}

/* Chosen on random cells (docs/theory.md). */
#define TALLEST  0.5        /* of the stub's length: a space between planes                                        */
#define SHORTEST 0.5e-3     /* m, unless a wall closes it: the notch of a short stub that radiates is a broad one  */
#define SLIVER   20e-6      /* m, between a pad and an end below it: annuli that cross the pad's rim hold too much */

int lstub__ladder_valid(const lstub__cav_barrel *b)
{
    const lstub__cav_returns *r = &b->returns;
    double z = 0.0, from = 0.0, tallest = 0.0, end = b->end > 0.0 ? b->end : INFINITY;
    int k;

    if (b->outer == LSTUB__CAV_RING && (r->edge[0] > 0.0 || (r->slot && r->vias == 0))) return 0;    /* planes that end; much flux */
    for (k = 0; k < b->layers; k++) {
        const lstub__cav_copper *c = &b->copper[k + 1];
        int plane = c->antipad > 0.0;

        z += b->layer[k].thickness;
        if (plane || k + 1 == b->layers) {
            double height = z - from + (plane ? 0.0 : c->thickness);
            if (from < end && height > tallest) tallest = height;
            from = z + c->thickness;
        }
        z += c->thickness;
        if (c->pad > b->radius && b->end > z - c->thickness && b->end < z + SLIVER) return 0;
    }
    if (z < end) end = z;
    return tallest < TALLEST * end && (b->outer == LSTUB__CAV_WALL || end > SHORTEST);
}

size_t lstub__ladder_bytes(const lstub__ladder *ladder) { return ladder->bytes; }

void lstub__ladder_free(lstub__ladder *ladder)
{
    if (ladder != NULL) ladder->release(ladder->user, ladder);
}
