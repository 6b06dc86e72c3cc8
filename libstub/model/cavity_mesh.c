/*
** Cuts a barrel into slabs, and the openings between them into annuli.
**
** A new slab begins wherever the barrel's radius, the dielectric or the outer boundary changes. Fields are singular at
** sharp copper rims (pads, antipads, the end of a barrel), so annuli shrink towards these with a power law: the error
** then falls with the third power of their number. All rims move continuously with every dimension: where an edge
** comes up (a pad just wider than its barrel) the grading towards it fades in.
*/
#include "model/cavity_parts.h"

#include <string.h>

#define GRADING   2.5       /* power; 2 to 3 are within a factor 1.3 of each other                       */
#define FADE      0.1       /* an edge is fully graded from this fraction of the opening on              */
#define REACH     1.5       /* an opening without plane ends this many plane distances outside its pad   */
#define NEAR      0.3       /* of an opening's width: distance at which other edges begin to be seen       */
#define THIN      0.2       /* of an opening's width: a slab fully counts as thin from half of that on  */
#define AXIS      0.3       /* inner rim of an opening below the barrel, of the barrel's radius: the field is 0 on the axis */
#define INSIDE    2         /* annuli of such an opening within the barrel's radius                     */
#define OUTSIDE   4         /* annuli beyond the neighbouring antipads' radius                           */
#define TINY      1e-10     /* m; thinner slabs are left out                                             */

typedef struct part {               /* a slab as it is cut, before faces */
    cav_slab slab;
    double   top, bottom;           /* depth */
    double   antipad;               /* of the plane it lies in, 0: none */
    int      keep;                  /* holds a pad: never joined to a neighbour */
    double   thin_antipad;          /* copper without thickness on its lower face: antipad of a plane, */
    double   thin_pad;              /* radius of a pad, 0: none */
} part;

typedef struct parts {
    part *list;
    int   count;
} parts;

static int same_slab(const part *a, const part *b)
{
    const cav_slab *x = &a->slab, *y = &b->slab;

    return a->thin_antipad == 0.0 && a->thin_pad == 0.0 && !a->keep && !b->keep && a->antipad == 0.0 && b->antipad == 0.0 && x->r_in == y->r_in && x->medium == y->medium
        && x->fill == y->fill && x->outer == y->outer;
}

static int add_part(const lstub__cav_barrel *barrel, parts *all, double top, double bottom, double r_in, double antipad,
                    int medium, int keep, int drilled)
{
    part p;

    if (bottom - top < TINY) {                  /* too thin for a slab: what is left is its copper */
        if (all->count > 0) {
            part *q = &all->list[all->count - 1];
            if (antipad > 0.0 && (q->thin_antipad == 0.0 || antipad < q->thin_antipad)) q->thin_antipad = antipad;
            if (keep && r_in > q->thin_pad) q->thin_pad = r_in;
        }
        return 0;
    }
    memset(&p, 0, sizeof p);
    p.top = top;
    p.bottom = bottom;
    p.antipad = antipad;
    p.keep = keep;
    p.slab.h = bottom - top;
    p.slab.r_in = r_in;
    p.slab.medium = medium;
    p.slab.fill = drilled ? barrel->fill : -1;
    p.slab.hole = barrel->hole;
    p.slab.copper = antipad > 0.0 || (keep && r_in > barrel->radius);
    p.slab.outer = antipad > 0.0 ? LSTUB__CAV_WALL : barrel->outer;
    p.slab.r_out = antipad > 0.0 ? antipad : barrel->outer == LSTUB__CAV_WALL ? barrel->wall : 0.0;
    if (p.slab.fill == medium) p.slab.fill = -1;
    if (all->count > 0 && same_slab(&all->list[all->count - 1], &p)) {
        part *q = &all->list[all->count - 1];
        q->bottom = bottom;
        q->slab.h = q->bottom - q->top;
        return 0;
    }
    if (all->count >= CAV_SLABS) return -2;
    all->list[all->count++] = p;
    return 0;
}

/* A level from top to bottom, cut where the drilled barrel ends. */
static int add_level(const lstub__cav_barrel *barrel, parts *all, double top, double bottom, double end, double r_in,
                     double antipad, int medium, int keep)
{
    double cut = end < top ? top : end > bottom ? bottom : end;
    int failed = 0;

    if (cut > top || bottom <= top) failed = add_part(barrel, all, top, cut, end < top ? 0.0 : r_in, antipad, medium, keep && end >= top, 0);
    if (!failed && bottom > cut) failed = add_part(barrel, all, cut, bottom, 0.0, antipad, medium, 0, barrel->end > 0.0);
    return failed;
}

static int cut_barrel(const lstub__cav_barrel *barrel, parts *all)
{
    double z = 0.0, end = barrel->end > 0.0 ? barrel->end : INFINITY;
    int k, failed = 0;

    all->count = 0;
    for (k = 0; k < barrel->layers && !failed; k++) {
        const lstub__cav_copper *c = &barrel->copper[k + 1];
        double next = z + barrel->layer[k].thickness, pad = c->pad > barrel->radius ? c->pad : barrel->radius;

        failed = add_level(barrel, all, z, next, end, barrel->radius, 0.0, barrel->layer[k].medium, 0);
        z = next + c->thickness;
        if (!failed) failed = add_level(barrel, all, next, z, end, pad, c->antipad, c->medium, c->pad > 0.0);
    }
    if (!failed && barrel->below == LSTUB__CAV_LID)
        failed = add_part(barrel, all, z, z + barrel->lid, 0.0, 0.0, barrel->below_medium, 1, 0);
    return failed;
}

/* Cuts the part that holds the trace in two. */
static int cut_at_tap(const lstub__cav_barrel *barrel, parts *all)
{
    part *upper;
    int i;

    for (i = 0; i < all->count; i++) {
        if (barrel->tap <= all->list[i].top + TINY || barrel->tap >= all->list[i].bottom - TINY) continue;
        if (all->count >= CAV_SLABS) return -2;
        memmove(&all->list[i + 1], &all->list[i], (size_t)(all->count - i) * sizeof all->list[0]);
        all->count++;
        upper = &all->list[i];
        upper->bottom = upper[1].top = barrel->tap;
        upper->slab.h = upper->bottom - upper->top;
        upper[1].slab.h = upper[1].bottom - upper[1].top;
        upper->thin_antipad = 0.0;
        upper->thin_pad = barrel->tap_pad;
        upper->slab.tap = 1;
        return 0;
    }
    return -3;
}

/* ---- faces -------------------------------------------------------------------------------------- */

/* Rims from r0 to r1, graded towards r1 by `outer` and towards r0 by `inner`, 0 .. 1. */
static void rims(double r0, double r1, int n, double inner, double outer, double *x)
{
    int i;

    for (i = 0; i <= n; i++) {
        double s = (double)i / n, t = 1.0 - s, a = pow(s, GRADING), b = pow(t, GRADING);
        double at = inner * outer * (a / (a + b)) + (1.0 - inner) * outer * (1.0 - b) + inner * (1.0 - outer) * a
                  + (1.0 - inner) * (1.0 - outer) * s;
        x[i] = r0 + (r1 - r0) * at;
    }
    x[0] = r0;
    x[n] = r1;
}

static void set_face(cav_face *face, int cells, int refine, int shaped)
{
    int i;

    face->cells = cells;
    face->refine = refine;
    face->points = cells * refine + 1;
    face->shaped = shaped;
    face->plain = 0.0;
    for (i = 0; i < face->points; i++) face->log_x[i] = log(face->x[i]);
    for (i = 0; i < face->points - 1; i++) {
        int cell = i / refine;
        face->share[i] = (face->log_x[i + 1] - face->log_x[i])
                       / (face->log_x[(cell + 1) * refine] - face->log_x[cell * refine]);
    }
}

static double edge(double step, double width)
{
    double e = step / (FADE * width);

    return e > 1.0 ? 1.0 : e > 0.0 ? e : 0.0;
}

/* 1 where a face lies at an edge of copper that is not its own, 0 from a fraction of the opening's width on. */
static double nearness(double distance, double width)
{
    double n = 1.0 - fabs(distance) / (NEAR * width);

    return n > 0.0 ? n : 0.0;
}

/* 1 for a dielectric much thinner than the opening is wide: both its faces must then be able to carry the same field. */
static double thin(const cav_slab *s, double width)
{
    double n = s->copper ? 0.0 : 1.5 - s->h / (THIN * width);

    return n > 1.0 ? 1.0 : n > 0.0 ? n : 0.0;
}

/* Radius that the antipads above and below suggest at depth z, weighted by nearness, and the distance of the nearer
** plane and that between both; 0: no plane at all. */
static double near_antipad(const lstub__cav_barrel *barrel, double z, double *distance, double *gap)
{
    double depth = 0.0, above = 0.0, below = 0.0, da = 0.0, db = 0.0;
    int k;

    for (k = 0; k <= barrel->layers; k++) {
        const lstub__cav_copper *c = &barrel->copper[k];
        double top = k == 0 ? 0.0 : depth, bottom = k == 0 ? 0.0 : depth + c->thickness;

        if (c->antipad > 0.0) {
            if (bottom <= z) { above = c->antipad; da = z - bottom; }
            else if (below == 0.0) { below = c->antipad; db = top > z ? top - z : 0.0; }
        }
        depth = bottom + (k < barrel->layers ? barrel->layer[k].thickness : 0.0);
    }
    *gap = da + db;
    *distance = above == 0.0 || (below > 0.0 && db < da) ? db : da;
    if (above == 0.0) return below;
    if (below == 0.0 || da + db <= 0.0) return above;
    return (above * db + below * da) / (da + db);
}

static double least_outer(const cav_slab *a, const cav_slab *b, double reach)
{
    if (a->outer == LSTUB__CAV_WALL && a->r_out < reach) reach = a->r_out;
    if (b != NULL && b->outer == LSTUB__CAV_WALL && b->r_out < reach) reach = b->r_out;
    return reach;
}

/* The opening between part a and part b below it (NULL: half-space). */
static void face_between(const lstub__cav_barrel *barrel, const part *a, const part *b, int cells, int refine,
                         cav_face *face)
{
    const cav_slab *lower = b != NULL ? &b->slab : NULL;
    double ra = a->slab.r_in, rb = lower != NULL ? lower->r_in : 0.0, r0 = ra > rb ? ra : rb, r1, reach, mid, middle, gap;
    double step, near = 0.0;
    int plane = a->antipad > 0.0 || (b != NULL && b->antipad > 0.0) || a->thin_antipad > 0.0;

    if (a->thin_pad > r0) r0 = a->thin_pad;
    step = r0 - (ra < rb ? ra : rb);            /* an edge of copper at the inner rim */

    if (plane) {
        r1 = least_outer(&a->slab, lower, a->thin_antipad > 0.0 ? a->thin_antipad : INFINITY);
        near = barrel->end > 0.0 ? nearness(a->bottom - barrel->end, r1 - barrel->radius) : 0.0;
        if (r0 > 0.0) {
            rims(r0, r1, cells * refine, fmax(edge(step, r1 - r0), near), 1.0, face->x);
            set_face(face, cells, refine, cells);
            face->plain = fmax(near, fmax(thin(&a->slab, r1 - r0), lower != NULL ? thin(lower, r1 - r0) : 0.0));
        } else {
            rims(AXIS * barrel->radius, barrel->radius, INSIDE, 0.0, near, face->x);
            rims(barrel->radius, r1, cells, near, 1.0, face->x + INSIDE);
            set_face(face, cells + INSIDE, 1, 0);
        }
        return;
    }
    middle = a->keep && a->slab.r_in > 0.0 ? 0.5 * (a->top + a->bottom)
           : b != NULL && b->keep && rb > 0.0 ? 0.5 * (b->top + b->bottom) : a->bottom;
    mid = near_antipad(barrel, middle, &near, &gap);
    if (r0 == 0.0) {                            /* two dielectrics below the barrel's end */
        r1 = least_outer(&a->slab, lower, mid > 0.0 ? 2.0 * mid : 2.0 * barrel->hole + 3.0 * a->slab.h);
        rims(AXIS * barrel->radius, barrel->radius, INSIDE, 0.0, 0.0, face->x);
        rims(barrel->radius, r1, cells, 0.0, 0.0, face->x + INSIDE);
        set_face(face, cells + INSIDE, 1, 0);
        return;
    }
    reach = r0 + REACH * gap;
    if (reach < 2.0 * mid) reach = 2.0 * mid;
    if (reach < 2.0 * r0) reach = 2.0 * r0;
    r1 = least_outer(&a->slab, lower, reach);
    if (mid < r0 + 0.25 * (r1 - r0)) mid = r0 + 0.25 * (r1 - r0);
    if (mid > r0 + 0.75 * (r1 - r0)) mid = r0 + 0.75 * (r1 - r0);
    if (step == 0.0 && !a->slab.tap && !a->keep && a->thin_pad == 0.0 && !(b != NULL && b->keep)) refine = 1;     /* only the dielectric changes */
    near = nearness(near, mid - r0);
    rims(r0, mid, cells * refine, edge(step, mid - r0), near, face->x);
    rims(mid, r1, OUTSIDE * refine, 0.0, 0.0, face->x + cells * refine);
    set_face(face, cells + OUTSIDE, refine, cells);
    face->plain = near;
}

/* The first opening, and the coaxial line above it that carries the port. */
static void feed_faces(const lstub__cav_barrel *barrel, int cells, int refine, cav_mesh *mesh)
{
    const lstub__cav_copper *c = &barrel->copper[0];
    double r0 = c->pad > barrel->radius ? c->pad : barrel->radius, r1 = c->antipad;
    cav_face *face = &mesh->face[mesh->feed_face];

    rims(r0, r1, cells * refine, edge(r0 - barrel->radius, r1 - r0), 1.0, face->x);
    set_face(face, cells, refine, cells);
    face = &mesh->face[mesh->tem_face];
    face->x[0] = r0;
    face->x[1] = r1;
    set_face(face, 1, 1, 0);
    mesh->feed_height = 2.0 * (r1 - r0) / CAV_FEED;
}

static void feed_slabs(const lstub__cav_barrel *barrel, cav_mesh *mesh)
{
    const cav_face *face = &mesh->face[mesh->tem_face];
    int k;

    for (k = 0; k < CAV_FEED; k++) {
        cav_slab *s = &mesh->slab[k];

        memset(s, 0, sizeof *s);
        s->h = mesh->feed_height;
        s->r_in = face->x[0];
        s->r_out = face->x[1];
        s->outer = LSTUB__CAV_WALL;
        s->medium = barrel->copper[0].medium;
        s->fill = -1;
        s->top = k == 0 ? mesh->tem_face : mesh->feed_face;
        s->bottom = mesh->feed_face;
    }
}

int cav_mesh_make(const lstub__cav_barrel *barrel, int cells, int refine, void *scratch, cav_mesh *mesh)
{
    parts all;
    int failed, k;

    all.list = scratch;
    failed = cut_barrel(barrel, &all);
    if (!failed && barrel->tap > 0.0) failed = cut_at_tap(barrel, &all);
    if (failed) return failed;
    if (all.count == 0 || all.count + CAV_FEED > CAV_SLABS) return -2;
    mesh->feed_face = 0;
    mesh->tem_face = 1;
    mesh->faces = 2;
    feed_faces(barrel, cells, refine, mesh);
    feed_slabs(barrel, mesh);
    mesh->slabs = CAV_FEED;
    mesh->half_face = -1;
    for (k = 0; k < all.count; k++) {
        cav_slab *s = &mesh->slab[mesh->slabs++];
        int last = k + 1 == all.count;

        *s = all.list[k].slab;
        s->top = mesh->slab[mesh->slabs - 2].bottom;
        s->bottom = -1;
        if (last && barrel->below == LSTUB__CAV_LID) break;
        s->bottom = mesh->faces++;
        face_between(barrel, &all.list[k], last ? NULL : &all.list[k + 1], cells, refine, &mesh->face[s->bottom]);
        if (last) mesh->half_face = s->bottom;
    }
    return 0;
}

size_t cav_mesh_scratch(void) { return CAV_SLABS * sizeof(part); }
