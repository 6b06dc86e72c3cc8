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
    int      thin_metal;
} part;

typedef struct parts {              /* of one barrel */
    part  *list;
    int    count;
    double cap_antipad, cap_pad;    /* copper without thickness on top of all */
    int    cap_metal;
    const lstub__cav_cut *own;
    double cut[2 * (LSTUB__CAV_TAPS + 2)];      /* depths where both barrels are cut, rising */
    int    cuts;
} parts;

static int same_slab(const part *a, const part *b)
{
    const cav_slab *x = &a->slab, *y = &b->slab;

    return a->thin_antipad == 0.0 && a->thin_pad == 0.0 && x->tap < 0 && !a->keep && !b->keep && a->antipad == 0.0 && b->antipad == 0.0
        && x->r_in == y->r_in && x->medium == y->medium && x->fill == y->fill && x->outer == y->outer && x->vias == y->vias;
}

static void add_thin(parts *all, double r_in, double antipad, int keep, int metal)
{
    double *thin_antipad = all->count > 0 ? &all->list[all->count - 1].thin_antipad : &all->cap_antipad;
    double *thin_pad = all->count > 0 ? &all->list[all->count - 1].thin_pad : &all->cap_pad;

    if (antipad > 0.0 && (*thin_antipad == 0.0 || antipad < *thin_antipad)) {
        *thin_antipad = antipad;
        if (all->count > 0) all->list[all->count - 1].thin_metal = metal;
        else all->cap_metal = metal;
    }
    if (keep && r_in > *thin_pad) *thin_pad = r_in;
}

static int add_part(const lstub__cav_barrel *barrel, parts *all, double top, double bottom, double r_in, double antipad,
                    int medium, int keep, int drilled, int metal)
{
    part p;

    if (bottom - top < TINY) {                  /* too thin for a slab: what is left is its copper */
        add_thin(all, r_in, antipad, keep, metal);
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
    p.slab.tap = -1;
    p.slab.metal_top = p.slab.metal_bottom = -1;
    p.slab.metal_wall = antipad > 0.0 ? metal : -1;
    if (p.slab.fill == medium) p.slab.fill = -1;
    if (all->count >= CAV_SLABS / 2) return -2;
    all->list[all->count++] = p;
    return 0;
}

/* A level from top to bottom, cut where a barrel begins or ends and where a trace leaves. */
static int add_level(const lstub__cav_barrel *barrel, parts *all, double top, double bottom, double r_in, double antipad,
                     int medium, int keep, int metal)
{
    double end = all->own->end > 0.0 ? all->own->end : INFINITY, at = top;
    int failed = 0, i;

    for (i = 0; i <= all->cuts && !failed; i++) {
        double next = i < all->cuts ? all->cut[i] : bottom, middle;
        int inside;
        if (next < bottom && (next <= at + TINY || next >= bottom - TINY)) continue;    /* nothing thinner than that is cut off */
        if (next > bottom) next = bottom;
        middle = 0.5 * (at + next);
        inside = middle >= all->own->begin && middle <= end;
        failed = add_part(barrel, all, at, next, inside ? r_in : 0.0, antipad, medium, keep && inside, !inside, metal);
        at = next;
        if (next >= bottom) break;
    }
    return failed;
}

static int cut_barrel(const lstub__cav_barrel *barrel, parts *all)
{
    double z = 0.0;
    int k, failed = 0;

    all->count = 0;
    all->cap_antipad = all->cap_pad = 0.0;
    if (barrel->top == LSTUB__CAV_FREE && barrel->below == LSTUB__CAV_LID)
        failed = add_part(barrel, all, -barrel->lid, 0.0, 0.0, 0.0, barrel->below_medium, 1, 0, 0);
    for (k = barrel->top == LSTUB__CAV_FREE ? 0 : 1; k <= barrel->layers && !failed; k++) {
        const lstub__cav_copper *c = &barrel->copper[k];
        double next = k > 0 ? z + barrel->layer[k - 1].thickness : z, pad = c->pad > barrel->radius ? c->pad : barrel->radius;

        if (k > 0) failed = add_level(barrel, all, z, next, barrel->radius, 0.0, barrel->layer[k - 1].medium, 0, 0);
        z = next + c->thickness;
        if (!failed) failed = add_level(barrel, all, next, z, pad, c->antipad, c->medium, c->pad > 0.0, c->metal);
    }
    if (!failed && barrel->below == LSTUB__CAV_LID)
        failed = add_part(barrel, all, z, z + barrel->lid, 0.0, 0.0, barrel->below_medium, 1, 0, 0);
    return failed;
}

/* The planes that each slab touches: what its waves lose. */
static void mark_metal(const lstub__cav_barrel *barrel, parts *all)
{
    int i;

    for (i = 0; i < all->count; i++) {
        part *p = &all->list[i], *up = i > 0 ? &all->list[i - 1] : NULL, *down = i + 1 < all->count ? &all->list[i + 1] : NULL;
        if (p->antipad > 0.0) continue;
        if (up == NULL) p->slab.metal_top = barrel->top == LSTUB__CAV_FED ? barrel->copper[0].metal : all->cap_antipad > 0.0 ? all->cap_metal : -1;
        else if (up->antipad > 0.0) p->slab.metal_top = up->slab.metal_wall;
        else if (up->thin_antipad > 0.0) p->slab.metal_top = up->thin_metal;
        if (down != NULL && down->antipad > 0.0) p->slab.metal_bottom = down->slab.metal_wall;
        else if (p->thin_antipad > 0.0) p->slab.metal_bottom = p->thin_metal;
    }
}

static void add_cut(parts *all, double depth)
{
    int i;

    if (depth <= 0.0) return;
    for (i = all->cuts++; i > 0 && all->cut[i - 1] > depth; i--) all->cut[i] = all->cut[i - 1];
    all->cut[i] = depth;
}

static void all_cuts(parts *all, const lstub__cav_cut *cut)
{
    int i;

    add_cut(all, cut->begin);
    add_cut(all, cut->end);
    for (i = 0; i < cut->taps; i++) add_cut(all, cut->tap[i]);
}

/* Marks the slabs at whose lower face a trace leaves; the uppermost face is marked in *cap. */
static int mark_taps(parts *all, int *cap)
{
    int i, k;

    *cap = -1;
    for (i = 0; i < all->own->taps; i++) {
        if (fabs(all->own->tap[i]) <= TINY) { *cap = i; continue; }
        for (k = 0; k < all->count; k++) if (fabs(all->own->tap[i] - all->list[k].bottom) <= TINY) break;
        if (k == all->count) return -3;
        all->list[k].slab.tap = i;
    }
    return 0;
}

/* Between the depths of its planes: which vias join both. */
static void mark_vias(const lstub__cav_barrel *barrel, parts *all)
{
    const lstub__cav_returns *r = &barrel->returns;
    double above = barrel->top == LSTUB__CAV_FREE && all->cap_antipad == 0.0 ? -INFINITY : 0.0, below;
    int i, j, k;

    for (i = 0; i < all->count; i = j) {
        for (j = i; j < all->count && all->list[j].antipad == 0.0; j++) if (all->list[j].thin_antipad > 0.0) { j++; break; }
        below = j > i ? all->list[j - 1].bottom : all->list[i].bottom;
        if (j == all->count && !(j > i && all->list[j - 1].thin_antipad > 0.0)) below = INFINITY;
        for (k = i; k < j; k++) all->list[k].slab.vias = cav_joining(r, above, below);
        if (j < all->count && all->list[j].antipad > 0.0) { below = all->list[j].bottom; j++; }
        above = below;
    }
}

/* Joins slabs that differ in nothing, in all barrels at once: they stay side by side. */
static void join_parts(parts *all, int barrels)
{
    int i, b, n = 1;

    for (i = 1; i < all[0].count; i++) {
        int same = 1;
        for (b = 0; b < barrels; b++) same = same && same_slab(&all[b].list[n - 1], &all[b].list[i]);
        for (b = 0; b < barrels; b++) {
            part *last = &all[b].list[n - 1], *p = &all[b].list[i];
            if (!same) { all[b].list[n] = *p; continue; }
            last->bottom = p->bottom;
            last->slab.h = last->bottom - last->top;
            last->slab.tap = p->slab.tap;
            last->thin_antipad = p->thin_antipad;
            last->thin_pad = p->thin_pad;
            last->thin_metal = p->thin_metal;
        }
        if (!same) n++;
    }
    for (b = 0; b < barrels; b++) all[b].count = n;
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
        double top = depth, bottom = k == 0 && barrel->top == LSTUB__CAV_FED ? 0.0 : depth + c->thickness;

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

/* The pad wider than r0 whose faces are nearest to depth z, as seen from an opening of this width: its radius, and how near, 0 .. 1. */
static double near_pad(const lstub__cav_barrel *barrel, const lstub__cav_cut *own, double z, double r0, double r1, double *radius)
{
    double depth = 0.0, most = 0.0, end = own->end > 0.0 ? own->end : INFINITY;
    int k;

    for (k = 0; k <= barrel->layers; k++) {
        const lstub__cav_copper *c = &barrel->copper[k];
        double top = depth, bottom = k == 0 && barrel->top == LSTUB__CAV_FED ? depth : depth + c->thickness, near;

        depth = bottom + (k < barrel->layers ? barrel->layer[k].thickness : 0.0);
        if (c->pad <= r0 || c->pad >= r1 || top < own->begin || bottom > end || (k == 0 && barrel->top == LSTUB__CAV_FED)) continue;
        near = nearness(z < top ? top - z : z > bottom ? z - bottom : 0.0, c->pad - r0) * edge(c->pad - r0, r1 - r0) * edge(r1 - c->pad, r1 - r0);
        if (near > most) { most = near; *radius = c->pad; }
    }
    return most;
}

/* Draws rims that grade from r0 to r1 towards those that grade to a pad's edge between them, too. */
static void draw_to_pad(double r0, double pad, double r1, double near, int n, double inner, double outer, double *x)
{
    double y[LSTUB__CAV_POINTS];
    int half = n / 2, i;

    rims(r0, pad, half, inner, 1.0, y);
    rims(pad, r1, n - half, 1.0, outer, y + half);
    for (i = 0; i <= n; i++) x[i] += near * (y[i] - x[i]);
}

static double least_outer(const cav_slab *a, const cav_slab *b, double reach)
{
    if (a != NULL && a->outer == LSTUB__CAV_WALL && a->r_out < reach) reach = a->r_out;
    if (b != NULL && b->outer == LSTUB__CAV_WALL && b->r_out < reach) reach = b->r_out;
    return reach;
}

/* How far waves about the axis hold: to the nearest return via or the partner. */
static double clear_radius(const lstub__cav_barrel *barrel)
{
    const lstub__cav_returns *r = &barrel->returns;
    double least = INFINITY;
    int i;

    if (barrel->outer != LSTUB__CAV_RING) return least;
    for (i = 0; i < r->vias; i++) least = fmin(least, hypot(r->via[i].x, r->via[i].y) - r->via[i].radius);
    if (r->pitch > 0.0) least = fmin(least, r->pitch - barrel->radius);
    return least;
}

/* The same between layers without plane, where a pad as it grows wider than the barrel makes copper of it. */
static double padless(const lstub__cav_barrel *barrel, const cav_slab *s, double width)
{
    double n = s != NULL ? 1.5 - s->h / (THIN * width) : 0.0;

    n = n > 1.0 ? 1.0 : n > 0.0 ? n : 0.0;
    return s != NULL && s->r_in > barrel->radius ? n * (1.0 - edge(s->r_in - barrel->radius, width)) : n;
}

typedef struct seam {               /* two slabs meet, or one and a half-space (null) */
    const part *a, *b;              /* above, below */
    double z, thin_antipad, thin_pad;
    int    tap;
} seam;

static int between_planes(const seam *m)
{
    return m->a != NULL && m->b != NULL && !(m->a->slab.vias & CAV_BEYOND) && !(m->b->slab.vias & CAV_BEYOND);
}

static double end_nearness(const lstub__cav_cut *own, double z, double width)
{
    double near = own->end > 0.0 ? nearness(z - own->end, width) : 0.0;

    return own->begin > 0.0 ? fmax(near, nearness(z - own->begin, width)) : near;
}

static void face_between(const lstub__cav_barrel *barrel, const lstub__cav_cut *own, const seam *m, int cells, int refine,
                         cav_face *face)
{
    const part *a = m->a, *b = m->b;
    const cav_slab *upper = a != NULL ? &a->slab : NULL, *lower = b != NULL ? &b->slab : NULL;
    double ra = upper != NULL ? upper->r_in : 0.0, rb = lower != NULL ? lower->r_in : 0.0, r0 = ra > rb ? ra : rb, r1, reach, mid;
    double middle, gap, step, inner, tip, near = 0.0, by_pad, pad = 0.0;
    int plane = (a != NULL && a->antipad > 0.0) || (b != NULL && b->antipad > 0.0) || m->thin_antipad > 0.0;

    if (m->thin_pad > r0) r0 = m->thin_pad;
    step = r0 - (ra < rb ? ra : rb);            /* an edge of copper at the inner rim */

    if (plane) {
        r1 = least_outer(upper, lower, m->thin_antipad > 0.0 ? m->thin_antipad : INFINITY);
        near = end_nearness(own, m->z, r1 - barrel->radius);
        if (r0 > 0.0) {
            rims(r0, r1, cells * refine, fmax(edge(step, r1 - r0), near), 1.0, face->x);
            set_face(face, cells, refine, cells);
            face->plain = fmax(near, fmax(upper != NULL ? thin(upper, r1 - r0) : 0.0, lower != NULL ? thin(lower, r1 - r0) : 0.0));
        } else {
            rims(AXIS * barrel->radius, barrel->radius, INSIDE, 0.0, near, face->x);
            rims(barrel->radius, r1, cells, near, 1.0, face->x + INSIDE);
            set_face(face, cells + INSIDE, 1, 0);
        }
        return;
    }
    middle = a != NULL && a->keep && ra > 0.0 ? 0.5 * (a->top + a->bottom) : b != NULL && b->keep && rb > 0.0 ? 0.5 * (b->top + b->bottom) : m->z;
    mid = near_antipad(barrel, middle, &near, &gap);
    inner = r0 > 0.0 ? r0 : barrel->radius;     /* 0: dielectrics beyond the barrel's end, cut as its end is */
    reach = fmax(inner + REACH * gap, fmax(2.0 * mid, 2.0 * inner));
    if (mid == 0.0) reach = fmax(reach, 2.0 * barrel->hole + 3.0 * (upper != NULL ? upper->h : lower->h));
    if (between_planes(m)) reach = fmin(reach, fmax(clear_radius(barrel), 1.2 * inner));
    r1 = least_outer(upper, lower, reach);
    if (mid < inner + 0.25 * (r1 - inner)) mid = inner + 0.25 * (r1 - inner);
    if (mid > inner + 0.75 * (r1 - inner)) mid = inner + 0.75 * (r1 - inner);
    near = nearness(near, mid - inner);
    tip = end_nearness(own, m->z, mid - inner);
    if (r0 == 0.0) {
        rims(AXIS * inner, inner, INSIDE, 0.0, tip, face->x);
        rims(inner, mid, cells, tip, near, face->x + INSIDE);
        rims(mid, r1, OUTSIDE, 0.0, 0.0, face->x + INSIDE + cells);
        set_face(face, INSIDE + cells + OUTSIDE, 1, 0);
        return;
    }
    if (step == 0.0 && m->tap < 0 && !(a != NULL && a->keep) && m->thin_pad == 0.0 && !(b != NULL && b->keep)) refine = 1;  /* only the dielectric changes */
    tip = fmax(tip, edge(step, mid - r0));
    rims(r0, mid, cells * refine, tip, near, face->x);
    by_pad = near_pad(barrel, own, m->z, r0, mid, &pad);
    if (by_pad > 0.0) draw_to_pad(r0, pad, mid, by_pad, cells * refine, tip, near, face->x);
    rims(mid, r1, OUTSIDE * refine, 0.0, 0.0, face->x + cells * refine);
    set_face(face, cells + OUTSIDE, refine, cells);
    face->plain = fmax(near, fmax(padless(barrel, upper, mid - r0), padless(barrel, lower, mid - r0)));
}

/* The first opening, and the coaxial line above it that carries the port. */
static void feed_faces(const lstub__cav_barrel *barrel, int cells, int refine, int feed, cav_mesh *mesh)
{
    const lstub__cav_copper *c = &barrel->copper[0];
    double r0 = c->pad > barrel->radius ? c->pad : barrel->radius, r1 = c->antipad;
    cav_face *face = &mesh->face[feed];

    rims(r0, r1, cells * refine, edge(r0 - barrel->radius, r1 - r0), 1.0, face->x);
    set_face(face, cells, refine, cells);
    face = &mesh->face[feed + 1];
    face->x[0] = r0;
    face->x[1] = r1;
    set_face(face, 1, 1, 0);
    mesh->feed_height = 2.0 * (r1 - r0) / CAV_FEED;
}

static void feed_slabs(const lstub__cav_barrel *barrel, int feed, cav_mesh *mesh, cav_slab *slab)
{
    const cav_face *face = &mesh->face[feed + 1];
    int k;

    for (k = 0; k < CAV_FEED; k++) {
        cav_slab *s = &slab[k];

        memset(s, 0, sizeof *s);
        s->h = mesh->feed_height;
        s->r_in = face->x[0];
        s->r_out = face->x[1];
        s->outer = LSTUB__CAV_WALL;
        s->medium = barrel->copper[0].medium;
        s->fill = s->tap = s->metal_top = s->metal_bottom = s->metal_wall = -1;
        s->top = k == 0 ? feed + 1 : feed;
        s->bottom = feed;
    }
}

/* One barrel's slabs from `slab` on, and its faces. */
static void lay_barrel(const lstub__cav_barrel *barrel, const parts *all, int cells, int refine, int number, cav_mesh *mesh)
{
    cav_slab *slab = &mesh->slab[number * mesh->slabs];
    int feed = mesh->feed, face, k;
    seam m;

    mesh->first_face[number] = mesh->faces++;
    if (feed > 0) {
        mesh->faces++;
        feed_faces(barrel, cells, refine, mesh->first_face[number], mesh);
        feed_slabs(barrel, mesh->first_face[number], mesh, slab);
    } else if (mesh->open_top) {
        m.a = NULL;
        m.b = &all->list[0];
        m.z = m.b->top;
        m.thin_antipad = all->cap_antipad;
        m.thin_pad = all->cap_pad;
        m.tap = mesh->cap_tap[number];
        face_between(barrel, all->own, &m, cells, refine, &mesh->face[mesh->first_face[number]]);
    } else {
        mesh->faces--;
        mesh->first_face[number] = -1;
    }
    face = mesh->first_face[number];
    for (k = 0; k < all->count; k++) {
        cav_slab *s = &slab[feed + k];
        int last = k + 1 == all->count;

        *s = all->list[k].slab;
        s->top = face;
        s->bottom = -1;
        if (last && barrel->below == LSTUB__CAV_LID) break;
        s->bottom = face = mesh->faces++;
        m.a = &all->list[k];
        m.b = last ? NULL : &all->list[k + 1];
        m.z = m.a->bottom;
        m.thin_antipad = m.a->thin_antipad;
        m.thin_pad = m.a->thin_pad;
        m.tap = m.a->slab.tap;
        face_between(barrel, all->own, &m, cells, refine, &mesh->face[s->bottom]);
        s->plane = m.a->antipad > 0.0 || m.thin_antipad > 0.0;
        if (last) mesh->half_face[number] = s->bottom;
        if (s->top < 0) { s->top = s->bottom; s->bottom = -1; }     /* under a lid: turned over, which changes nothing */
    }
}

int cav_mesh_make(const lstub__cav_barrel *barrel, int cells, int refine, void *scratch, cav_mesh *mesh)
{
    lstub__cav_cut own;
    parts all[2];
    int failed = 0, b;

    own.begin = barrel->begin;
    own.end = barrel->end;
    own.taps = barrel->taps;
    memcpy(own.tap, barrel->tap, sizeof own.tap);
    mesh->barrels = barrel->partner != NULL ? 2 : 1;
    for (b = 0; b < mesh->barrels && !failed; b++) {
        all[b].list = (part *)scratch + b * (CAV_SLABS / 2);
        all[b].own = b == 0 ? &own : barrel->partner;
        all[b].cuts = 0;
        all_cuts(&all[b], &own);
        if (barrel->partner != NULL) all_cuts(&all[b], barrel->partner);
        failed = cut_barrel(barrel, &all[b]);
        if (!failed && all[b].count == 0) failed = -2;
        if (!failed) failed = mark_taps(&all[b], &mesh->cap_tap[b]);
        if (!failed) mark_vias(barrel, &all[b]);
    }
    if (failed) return failed;
    join_parts(all, mesh->barrels);
    for (b = 0; b < mesh->barrels; b++) mark_metal(barrel, &all[b]);
    mesh->feed = barrel->top == LSTUB__CAV_FED ? CAV_FEED : 0;
    mesh->open_top = barrel->top == LSTUB__CAV_FREE && barrel->below == LSTUB__CAV_HALFSPACE;
    mesh->slabs = all[0].count + mesh->feed;
    if (mesh->barrels * mesh->slabs > CAV_SLABS) return -2;
    mesh->faces = 0;
    mesh->feed_height = 0.0;
    for (b = 0; b < mesh->barrels; b++) {
        mesh->half_face[b] = -1;
        lay_barrel(barrel, &all[b], cells, refine, b, mesh);
    }
    return 0;
}

size_t cav_mesh_scratch(void) { return CAV_SLABS * sizeof(part); }
