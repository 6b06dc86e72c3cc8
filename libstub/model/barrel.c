#include "model/barrel.h"

#include <math.h>
#include <string.h>

/* The number of a medium, kept once. */
static int32_t medium(lstub__barrel *b, lstub__wideband law, double ratio, int *number, lstub_error *err)
{
    for (*number = 0; *number < b->media; ++*number)
        if (b->law[*number].constant == law.constant && b->law[*number].slope == law.slope && b->medium[*number].ratio == ratio)
            return LSTUB_OK;
    if (b->media == LSTUB__CAV_MEDIA)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "dielectric", -1, "dielectric: more than %d different ones along the barrel",
                           LSTUB__CAV_MEDIA);
    b->law[b->media] = law;
    b->medium[b->media].ratio = ratio;
    b->medium[b->media].dk = law.constant + law.slope * lstub__wideband_lambda(1e9).re;
    b->media++;
    return LSTUB_OK;
}

static int32_t medium_of(lstub__barrel *b, const lstub__layer *layer, int *number, lstub_error *err)
{
    return medium(b, layer->eps, layer->dielectric.in_plane_ratio, number, err);
}

static int32_t plain_medium(lstub__barrel *b, double dk, int *number, lstub_error *err)
{
    lstub__wideband law = {dk, 0.0};
    return medium(b, law, 1.0, number, err);
}

/*
** The opening that the stub is fed through. A plane that connects through its own antipad has it; on a layer without
** plane the stub starts in a thin plane of the nearest one's antipad: on the 3-D reference transitions the first notch
** then lies within 0.2 % with return vias, 2.3 % without (tests/reference).
*/
static double feed_opening(const lstub__site *site, int arm)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    int32_t exit = arm == 0 ? via->first : via->last, step = arm == 0 ? -1 : 1;
    double own = lstub__via_antipad(via, exit);
    for (int32_t k = 1; own == 0.0 && k < s->count; k++)
        for (int way = 1; own == 0.0 && way >= -1; way -= 2) {
            int32_t i = exit + way * step * k;
            if (i >= via->in.start_layer && i <= via->in.end_layer && lstub__is_copper(s->layer[i].kind))
                own = lstub__via_antipad(via, i);
        }
    return 0.5 * own;
}

/* A slot around a pair is the round antipad that acts like it in this mode, at the mean height of the spaces beside it. */
static double seen_antipad(const lstub__site *site, int32_t layer, double sign)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    double antipad = lstub__via_antipad(via, layer), height = 0.0;
    if (via->in.pair_kind != LSTUB_PAIR_SHARED || antipad == 0.0)
        return antipad;
    for (int32_t i = layer - 1; i <= layer + 1; i += 2)
        if (i >= 0 && i < s->count)
            height += 0.5 * s->layer[i].thickness;
    return fmax(lstub__slot_antipad(&via->in, antipad, height, sign), 1.02 * fmax(via->in.drill, lstub__via_pad(via, layer)));
}

static int32_t give_layers(lstub__barrel *b, const lstub__site *site, int arm, lstub_error *err)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    int32_t step = arm == 0 ? -1 : 1, exit = arm == 0 ? via->first : via->last, end = arm == 0 ? via->in.start_layer : via->in.end_layer;
    int32_t status;
    int n = 0;
    b->copper[0].thickness = s->layer[exit].thickness;
    b->copper[0].antipad = feed_opening(site, arm);
    b->copper[0].pad = 0.0;
    if ((status = medium_of(b, &s->layer[exit + step], &b->copper[0].medium, err)) < 0)
        return status;
    for (int32_t i = exit + step; i != end + step; i += step) {
        const lstub__layer *layer = &s->layer[i];
        if (!lstub__is_copper(layer->kind)) {            /* dielectrics that touch become parts of one space */
            if (n > 0 && b->layer[n - 1].thickness == 0.0)
                return LSTUB_E_GEOMETRY;
            b->layer[n].thickness = layer->thickness;
            if ((status = medium_of(b, layer, &b->layer[n].medium, err)) < 0)
                return status;
            n++;
            b->copper[n].thickness = b->copper[n].antipad = b->copper[n].pad = 0.0;
            b->copper[n].medium = b->layer[n - 1].medium;
            continue;
        }
        b->copper[n].thickness = layer->thickness;
        b->copper[n].antipad = 0.5 * seen_antipad(site, i, -1.0);
        b->copper[n].pad = 0.5 * lstub__via_pad(via, i);
        if (i == end)
            status = plain_medium(b, via->in.outside_dk, &b->copper[n].medium, err);
        else
            status = medium_of(b, layer, &b->copper[n].medium, err);
        if (status < 0)
            return status;
    }
    b->shape.layers = n;
    return LSTUB_OK;
}

#define PAIR_RING 6           /* evenly spread vias around a barrel of a pair, at most: their places are not known anyway */

/* Adds a via unless it is there already; a status. */
static int32_t add_via(lstub__barrel *b, const lstub_via *in, int32_t number, double x, double y, lstub_error *err)
{
    lstub__cav_returns *r = &b->shape.returns;
    for (int i = 0; i < r->vias; i++) {
        double d = hypot(x - b->via[i].x, y - b->via[i].y);
        if (d <= 1e-9 || (in->return_xy == NULL && d <= in->return_drill))
            return LSTUB_OK;
        if (d <= in->return_drill)
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", number, "return_xy[%ld]: it or its mirror image at %.9g, %.9g m touches another of a pair's "
                               "return vias, which stand as their mirror images do", (long)number, x, y);
    }
    if (r->vias == LSTUB__CAV_VIAS)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "return_count", -1, "return_count = %ld: more than %d return vias here, mirror images of a "
                           "pair included, are not computed", (long)in->return_count, LSTUB__CAV_VIAS);
    lstub__cav_via *v = &b->via[r->vias++];
    v->x = x;
    v->y = y;
    v->radius = 0.5 * in->return_drill;
    if (in->return_spans != NULL) {
        const lstub__layer *first = &b->stackup->layer[in->return_spans[2 * number]], *last = &b->stackup->layer[in->return_spans[2 * number + 1]];
        v->from = b->up ? b->origin - last->bottom : first->top - b->origin;
        v->to = b->up ? b->origin - first->top : last->bottom - b->origin;
    }
    return LSTUB_OK;
}

/*
** Vias around a pair, whose partner is at (pair_pitch, 0). Odd mode is a mode only of a pattern that its mirror image leaves
** as it is: every via brings its image; two barrels of their own take given places as they are. Evenly spread ones stand so that the partner is midway between two.
*/
static int32_t give_pair_vias(lstub__barrel *b, const lstub_via *in, int images, lstub_error *err)
{
    int32_t count = in->return_xy == NULL && in->return_count > PAIR_RING ? PAIR_RING : in->return_count;
    double reach = 0.5 * (in->drill + in->return_drill);
    for (int32_t i = 0; i < count; i++) {
        double angle = LSTUB_PI * (2 * i + 1) / count;
        double x = in->return_xy != NULL ? in->return_xy[2 * i] : in->return_distance * cos(angle);
        double y = in->return_xy != NULL ? in->return_xy[2 * i + 1] : in->return_distance * sin(angle);
        if (in->return_xy == NULL && fabs(2.0 * x - in->pair_pitch) <= in->return_drill)
            x = 0.5 * in->pair_pitch;               /* would touch its image: stands in the middle, its own image */
        if (hypot(x - in->pair_pitch, y) <= reach) {
            if (in->return_xy == NULL)
                continue;
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", i, "return_xy[%ld] = %.9g, %.9g m: touches the partner at %.9g m",
                               (long)i, x, y, in->pair_pitch);
        }
        int32_t status = add_via(b, in, i, x, y, err);
        if (status == LSTUB_OK && images)
            status = add_via(b, in, i, in->pair_pitch - x, y, err);
        if (status < 0)
            return status;
    }
    return LSTUB_OK;
}

/* Whether given places are those of a regular ring, which is computed by its symmetry. */
static int regular(const lstub_via *in)
{
    double s = hypot(in->return_xy[0], in->return_xy[1]), first = atan2(in->return_xy[1], in->return_xy[0]);
    if (in->return_spans != NULL)
        for (int32_t i = 1; i < in->return_count; i++)
            if (in->return_spans[2 * i] != in->return_spans[0] || in->return_spans[2 * i + 1] != in->return_spans[1])
                return 0;
    for (int32_t k = 1; k < in->return_count; k++) {
        double x = s * cos(first + 2.0 * LSTUB_PI * k / in->return_count), y = s * sin(first + 2.0 * LSTUB_PI * k / in->return_count);
        int32_t i = 1;
        while (i < in->return_count && hypot(in->return_xy[2 * i] - x, in->return_xy[2 * i + 1] - y) > 1e-9 * s)
            i++;
        if (i == in->return_count)
            return 0;
    }
    return in->return_count > 1;
}

/* Vias around a single barrel; evenly spread ones are one via and a number. */
static int32_t give_vias(lstub__barrel *b, const lstub_via *in, lstub_error *err)
{
    if ((in->return_xy == NULL || regular(in)) && in->edges[0] == 0.0) {
        b->shape.returns.even = in->return_count;
        return add_via(b, in, 0, in->return_xy == NULL ? in->return_distance : hypot(in->return_xy[0], in->return_xy[1]), 0.0, err);
    }
    for (int32_t i = 0; i < in->return_count && in->return_xy == NULL; i++) {     /* edges: no two of them are alike */
        double angle = 2.0 * LSTUB_PI * i / in->return_count;
        int32_t status = add_via(b, in, i, in->return_distance * cos(angle), in->return_distance * sin(angle), err);
        if (status < 0)
            return status;
    }
    if (in->return_xy == NULL)
        return LSTUB_OK;
    for (int32_t i = 0; i < in->return_count; i++) {
        int32_t status = add_via(b, in, i, in->return_xy[2 * i], in->return_xy[2 * i + 1], err);
        if (status < 0)
            return status;
    }
    return LSTUB_OK;
}

/* Mean radius of the openings and mean distance of the planes, for the flux through them. */
static void mean_openings(const lstub__site *site, double *radius, double *height)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    double sum = 0.0, top = 0.0, bottom = 0.0;
    int planes = 0;
    for (int32_t i = via->in.start_layer; i <= via->in.end_layer; i++) {
        double antipad = lstub__is_copper(s->layer[i].kind) ? lstub__via_antipad(via, i) : 0.0;
        if (antipad == 0.0)
            continue;
        sum += 0.5 * antipad;
        bottom = s->layer[i].top;
        if (planes++ == 0)
            top = s->layer[i].bottom;
    }
    *radius = sum / planes;
    *height = planes > 1 ? (bottom - top) / (planes - 1) : 0.2e-3;
}

/* Pull of the partner's pad on an end that stands in no plane: static 3-D solutions of pads of 0.45 mm, 0.8 to 0.9 mm apart. */
static double end_pull(const lstub__site *site, int32_t end, double sign)
{
    const lstub_via *in = &site->via.in;
    double pad = 0.5 * lstub__via_pad(&site->via, end), gap = in->pair_pitch - 2.0 * pad;
    double share = in->pair_kind == LSTUB_PAIR_SHARED ? (sign < 0.0 ? 0.15 : -0.075) : sign < 0.0 ? 0.11 : -0.11;
    if (pad <= 0.0 || lstub__via_antipad(&site->via, end) > 0.0)
        return 0.0;
    return share * LSTUB_EPS0 * 0.5 * (site->via.stackup->layer[end].dielectric.dk + 1.0) * pad * pad / gap;
}

int lstub__edges_even(const lstub_via *in)
{
    return in->edges[0] == 0.0 || fabs(in->edges[0] - (in->edges[1] - in->pair_pitch)) <= 1e-9;
}

int lstub__pair_even(const lstub_via *in)
{
    for (int32_t i = 0; in->return_xy != NULL && i < in->return_count; i++) {
        int32_t k = 0;
        while (k < in->return_count
               && (hypot(in->return_xy[2 * k] - (in->pair_pitch - in->return_xy[2 * i]), in->return_xy[2 * k + 1] - in->return_xy[2 * i + 1]) > 1e-9
                   || (in->return_spans != NULL && memcmp(&in->return_spans[2 * k], &in->return_spans[2 * i], 2 * sizeof in->return_spans[0]) != 0)))
            k++;
        if (k == in->return_count)
            return 0;
    }
    return lstub__edges_even(in);
}

/* sign: of the partner, driven; 0: it is a barrel of its own. */
static int32_t give_returns(lstub__barrel *b, const lstub__site *site, double sign, lstub_error *err)
{
    const lstub_via *in = &site->via.in;
    lstub__cav_returns *r = &b->shape.returns;
    int32_t status = LSTUB_OK;
    b->shape.outer = LSTUB__CAV_OPEN;
    b->shape.wall = in->return_distance;
    r->via = b->via;
    if (in->pair_kind != LSTUB_PAIR_NONE) {
        if (in->return_kind == LSTUB_RETURN_WALL)
            return lstub__fail(err, LSTUB_E_UNSUPPORTED, "return_kind", -1, "return_kind: a wall around a pair is not computed; use vias");
        b->shape.outer = LSTUB__CAV_RING;
        r->pitch = in->pair_pitch;
        r->sign = sign;
    }
    if (in->return_kind == LSTUB_RETURN_WALL)
        b->shape.outer = LSTUB__CAV_WALL;
    if (in->return_kind == LSTUB_RETURN_VIAS) {
        b->shape.outer = LSTUB__CAV_RING;
        status = in->pair_kind != LSTUB_PAIR_NONE ? give_pair_vias(b, in, sign != 0.0 || in->return_xy == NULL, err) : give_vias(b, in, err);
    }
    if (in->edges[0] > 0.0) {
        b->shape.outer = LSTUB__CAV_RING;
        memcpy(r->edge, in->edges, sizeof r->edge);
        r->shorted = in->edge_kind == LSTUB_EDGE_SHORTED;
        if (sign != 0.0 && in->pair_kind != LSTUB_PAIR_NONE && !lstub__edges_even(in))
            return lstub__fail(err, LSTUB_E_UNSUPPORTED, "edges", -1, "edges: %.9g m beside the barrel and %.9g m beside its partner: a pair in odd mode "
                               "is computed with equal ones only", in->edges[0], in->edges[1] - in->pair_pitch);
    }
    r->flux = b->shape.outer == LSTUB__CAV_RING && r->even < 2 && (in->pair_kind == LSTUB_PAIR_NONE || sign != 0.0);
    r->slot = in->pair_kind == LSTUB_PAIR_SHARED;
    mean_openings(site, &r->opening, &r->height);
    return status;
}

static double hole_of(const lstub__site *site, int arm)
{
    const lstub_via *in = &site->via.in;
    for (size_t i = 0; i < in->backdrill_count; i++)
        if (in->backdrills[i].side == lstub__side_of(arm))
            return 0.5 * in->backdrills[i].diameter;
    return 0.5 * site->bit;
}

static int32_t give_end(lstub__barrel *b, const lstub__site *site, int arm, double length, lstub_error *err)
{
    const lstub_via *in = &site->via.in;
    int32_t status;
    b->shape.below = in->lid_distance > 0.0 ? LSTUB__CAV_LID : LSTUB__CAV_HALFSPACE;
    b->shape.lid = in->lid_distance;
    if ((status = plain_medium(b, in->outside_dk, &b->shape.below_medium, err)) < 0
        || (status = plain_medium(b, in->hole_dk, &b->shape.fill, err)) < 0)
        return status;
    if (length < site->arm[arm].full) {
        b->shape.end = length;
        b->shape.hole = hole_of(site, arm);
    }
    return LSTUB_OK;
}

int32_t lstub__barrel_make(lstub__barrel **out, const lstub__site *site, int arm, double length, lstub_error *err)
{
    const lstub_via *in = &site->via.in;
    lstub__barrel *b = lstub__new(&site->alloc, 1, sizeof *b, err);
    if (b == NULL)
        return LSTUB_E_MEMORY;
    b->alloc = site->alloc;
    b->shape.radius = 0.5 * in->drill;
    b->shape.copper = b->copper;
    b->shape.layer = b->layer;
    b->shape.medium = b->medium;
    b->stackup = site->via.stackup;
    b->up = arm == 0;
    b->origin = arm == 0 ? b->stackup->layer[site->via.first].top : b->stackup->layer[site->via.last].bottom;
    int32_t status = give_layers(b, site, arm, err);
    if (status == LSTUB_OK)
        status = give_returns(b, site, -1.0, err);       /* odd mode */
    if (status == LSTUB_OK)
        status = give_end(b, site, arm, length, err);
    if (status == LSTUB_OK && in->pair_kind != LSTUB_PAIR_NONE && b->shape.end == 0.0)
        b->shape.returns.pull = end_pull(site, arm == 0 ? in->start_layer : in->end_layer, -1.0);
    if (status < 0) {
        lstub__barrel_free(b);
        return status;
    }
    b->shape.media = b->media;
    *out = b;
    return LSTUB_OK;
}

/* ---- the whole barrel, for a transition ---------------------------------------------------------- */

/* The number of a layer's metal, kept once. */
static int32_t metal_of(lstub__barrel *b, const lstub__layer *layer, int *number, lstub_error *err)
{
    const lstub_conductor *c = &layer->conductor;
    for (*number = 0; *number < b->metals; ++*number) {
        const lstub_conductor *k = &b->conductor[*number];
        if (k->conductivity == c->conductivity && k->roughness == c->roughness && k->roughness_law == c->roughness_law)
            return LSTUB_OK;
    }
    if (b->metals == LSTUB__CAV_METALS)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "conductor", -1, "conductor: more than %d different ones along the barrel", LSTUB__CAV_METALS);
    b->conductor[b->metals++] = *c;
    return LSTUB_OK;
}

static int32_t whole_layers(lstub__barrel *b, const lstub__site *site, const lstub__passage *way, lstub_error *err)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    double sign = way->sign < 0.0 || way->sign == 0.0 ? -1.0 : 1.0;     /* two barrels of their own: as in odd mode */
    int32_t status = LSTUB_OK;
    int n = 0;
    for (int32_t i = via->in.start_layer; i <= via->in.end_layer; i++) {
        const lstub__layer *layer = &s->layer[i];
        lstub__cav_copper *c = &b->copper[n];
        if (!lstub__is_copper(layer->kind)) {
            b->layer[n].thickness = layer->thickness;
            status = medium_of(b, layer, &b->layer[n].medium, err);
            c = &b->copper[++n];
            c->thickness = c->antipad = c->pad = 0.0;
            c->medium = b->layer[n - 1].medium;
        } else {
            int fed = way->fed && i == via->in.start_layer;
            c->thickness = layer->thickness;
            c->antipad = 0.5 * (fed ? lstub__via_antipad(via, i) : seen_antipad(site, i, sign));
            c->pad = fed ? 0.0 : 0.5 * lstub__via_pad(via, i);
            if ((status = metal_of(b, layer, &c->metal, err)) < 0)
                return status;
            if (fed)
                status = plain_medium(b, way->feed_dk, &c->medium, err);
            else if (i == via->in.start_layer || i == via->in.end_layer)
                status = plain_medium(b, via->in.outside_dk, &c->medium, err);
            else
                status = medium_of(b, layer, &c->medium, err);
        }
        if (status < 0)
            return status;
    }
    b->shape.layers = n;
    return LSTUB_OK;
}

static double tap_depth(const lstub__barrel *b, int32_t layer)
{
    const lstub__layer *l = &b->stackup->layer[layer];
    return 0.5 * (l->top + l->bottom) - b->origin;
}

static void cut_of(const lstub__barrel *b, const lstub__site *site, const lstub__passage *way, const lstub__ends *ends, lstub__cav_cut *cut)
{
    const lstub__layer *layer = b->stackup->layer;
    double top = way->removed ? layer[site->via.first].top : ends->top, bottom = way->removed ? layer[site->via.last].bottom : ends->bottom;
    memset(cut, 0, sizeof *cut);
    if (!way->fed && top > layer[site->via.in.start_layer].top + LSTUB__SLACK)
        cut->begin = top - b->origin;
    if (bottom < layer[site->via.in.end_layer].bottom - LSTUB__SLACK)
        cut->end = bottom - b->origin;
    cut->taps = way->taps;
    for (int i = 0; i < way->taps; i++)
        cut->tap[i] = tap_depth(b, way->layer[i]);
}

/* The hole that a drill leaves: one radius for all. */
static double widest_hole(const lstub_via *in)
{
    double widest = 0.0;
    for (size_t i = 0; i < in->backdrill_count; i++)
        widest = fmax(widest, 0.5 * in->backdrills[i].diameter);
    for (size_t i = 0; i < in->partner_backdrill_count; i++)
        widest = fmax(widest, 0.5 * in->partner_backdrills[i].diameter);
    return widest;
}

int32_t lstub__barrel_whole(lstub__barrel **out, const lstub__site *site, const lstub__passage *way, lstub_error *err)
{
    const lstub_via *in = &site->via.in;
    const lstub__layer *layer = site->via.stackup->layer;
    lstub__cav_cut own;
    lstub__barrel *b = lstub__new(&site->alloc, 1, sizeof *b, err);
    if (b == NULL)
        return LSTUB_E_MEMORY;
    b->alloc = site->alloc;
    b->stackup = site->via.stackup;
    b->origin = way->fed ? layer[in->start_layer].bottom : layer[in->start_layer].top;
    b->shape.radius = 0.5 * in->drill;
    b->shape.copper = b->copper;
    b->shape.layer = b->layer;
    b->shape.medium = b->medium;
    b->shape.top = way->fed ? LSTUB__CAV_FED : LSTUB__CAV_FREE;
    b->shape.below = in->lid_distance > 0.0 ? LSTUB__CAV_LID : LSTUB__CAV_HALFSPACE;
    b->shape.lid = in->lid_distance;
    int32_t status = whole_layers(b, site, way, err);
    if (status == LSTUB_OK)
        status = give_returns(b, site, way->sign, err);
    if (status == LSTUB_OK)
        status = plain_medium(b, in->outside_dk, &b->shape.below_medium, err);
    if (status == LSTUB_OK && !way->removed)
        status = plain_medium(b, in->hole_dk, &b->shape.fill, err);
    if (status < 0) {
        lstub__barrel_free(b);
        return status;
    }
    cut_of(b, site, way, &site->via.ends, &own);
    b->shape.begin = own.begin;
    b->shape.end = own.end;
    b->shape.taps = own.taps;
    memcpy(b->shape.tap, own.tap, sizeof own.tap);
    b->shape.hole = widest_hole(in);
    if (way->removed)
        b->shape.fill = -1;
    if (in->pair_kind != LSTUB_PAIR_NONE && way->sign == 0.0) {
        cut_of(b, site, way, &site->via.partner, &b->partner);
        b->shape.partner = &b->partner;
    } else if (in->pair_kind != LSTUB_PAIR_NONE && b->shape.end == 0.0) {
        b->shape.returns.pull = end_pull(site, in->end_layer, way->sign);
    }
    b->shape.media = b->media;
    *out = b;
    return LSTUB_OK;
}

void lstub__barrel_free(lstub__barrel *barrel)
{
    if (barrel == NULL)
        return;
    lstub_allocator alloc = barrel->alloc;
    lstub__free(&alloc, barrel);
}

void lstub__barrel_metals(const lstub__barrel *barrel, double f, cplx *surface)
{
    for (int i = 0; i < barrel->metals; i++)
        surface[i] = lstub__surface_impedance(&barrel->conductor[i], f);
}

void lstub__barrel_media(const lstub__barrel *barrel, double f, cplx *eps)
{
    cplx lambda = lstub__wideband_lambda(f);
    for (int i = 0; i < barrel->media; i++)
        eps[i] = lstub__wideband_at(barrel->law[i], lambda);
}
