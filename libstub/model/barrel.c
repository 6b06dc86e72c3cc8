#include "model/barrel.h"

#include <math.h>

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

/* A slot around a pair is the round antipad that acts like it in odd mode, at the mean height of the spaces beside it. */
static double seen_antipad(const lstub__site *site, int32_t layer)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    double antipad = lstub__via_antipad(via, layer), height = 0.0;
    if (via->in.pair_kind != LSTUB_PAIR_SHARED || antipad == 0.0)
        return antipad;
    for (int32_t i = layer - 1; i <= layer + 1; i += 2)
        if (i >= 0 && i < s->count)
            height += 0.5 * s->layer[i].thickness;
    return fmax(lstub__slot_antipad(&via->in, antipad, height), 1.02 * fmax(via->in.drill, lstub__via_pad(via, layer)));
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
        b->copper[n].antipad = 0.5 * seen_antipad(site, i);
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

/* Adds a via unless it meets one that is there; a status. */
static int32_t add_via(lstub__barrel *b, const lstub_via *in, double x, double y, lstub_error *err)
{
    lstub__cav_returns *r = &b->shape.returns;
    for (int i = 0; i < r->vias; i++)
        if (hypot(x - b->via[i].x, y - b->via[i].y) <= in->return_drill)
            return LSTUB_OK;
    if (r->vias == LSTUB__CAV_VIAS)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "return_count", -1, "return_count = %ld: more than %d return vias here, mirror images of a "
                           "pair included, are not computed", (long)in->return_count, LSTUB__CAV_VIAS);
    b->via[r->vias].x = x;
    b->via[r->vias].y = y;
    b->via[r->vias++].radius = 0.5 * in->return_drill;
    return LSTUB_OK;
}

/*
** Vias around a pair, whose partner is at (pair_pitch, 0). Odd mode is a mode only of a pattern that its mirror image leaves
** as it is: every via brings its image. Evenly spread ones stand so that the partner is midway between two.
*/
static int32_t give_pair_vias(lstub__barrel *b, const lstub_via *in, lstub_error *err)
{
    int32_t count = in->return_xy == NULL && in->return_count > PAIR_RING ? PAIR_RING : in->return_count;
    double reach = 0.5 * (in->drill + in->return_drill);
    for (int32_t i = 0; i < count; i++) {
        double angle = LSTUB_PI * (2 * i + 1) / count;
        double x = in->return_xy != NULL ? in->return_xy[2 * i] : in->return_distance * cos(angle);
        double y = in->return_xy != NULL ? in->return_xy[2 * i + 1] : in->return_distance * sin(angle);
        if (hypot(x - in->pair_pitch, y) <= reach) {
            if (in->return_xy == NULL)
                continue;
            return lstub__fail(err, LSTUB_E_GEOMETRY, "return_xy", i, "return_xy[%ld] = %.9g, %.9g m: touches the partner at %.9g m",
                               (long)i, x, y, in->pair_pitch);
        }
        int32_t status = add_via(b, in, x, y, err);
        if (status == LSTUB_OK)
            status = add_via(b, in, in->pair_pitch - x, y, err);
        if (status < 0)
            return status;
    }
    return LSTUB_OK;
}

/* Vias around a single barrel; evenly spread ones are one via and a number. */
static int32_t give_vias(lstub__barrel *b, const lstub_via *in, lstub_error *err)
{
    if (in->return_xy == NULL) {
        b->shape.returns.even = in->return_count;
        return add_via(b, in, in->return_distance, 0.0, err);
    }
    for (int32_t i = 0; i < in->return_count; i++) {
        int32_t status = add_via(b, in, in->return_xy[2 * i], in->return_xy[2 * i + 1], err);
        if (status < 0)
            return status;
    }
    return LSTUB_OK;
}

static int32_t give_returns(lstub__barrel *b, const lstub_via *in, lstub_error *err)
{
    int32_t status = LSTUB_OK;
    b->shape.outer = LSTUB__CAV_OPEN;
    b->shape.wall = in->return_distance;
    b->shape.returns.via = b->via;
    if (in->pair_kind != LSTUB_PAIR_NONE) {
        if (in->return_kind == LSTUB_RETURN_WALL)
            return lstub__fail(err, LSTUB_E_UNSUPPORTED, "return_kind", -1, "return_kind: a wall around a pair is not computed; use vias");
        b->shape.outer = LSTUB__CAV_RING;
        b->shape.returns.pitch = in->pair_pitch;
        b->shape.returns.sign = -1.0;          /* odd mode */
    }
    if (in->return_kind == LSTUB_RETURN_WALL)
        b->shape.outer = LSTUB__CAV_WALL;
    if (in->return_kind == LSTUB_RETURN_VIAS) {
        b->shape.outer = LSTUB__CAV_RING;
        status = in->pair_kind != LSTUB_PAIR_NONE ? give_pair_vias(b, in, err) : give_vias(b, in, err);
    }
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
    int32_t status = give_layers(b, site, arm, err);
    if (status == LSTUB_OK)
        status = give_returns(b, in, err);
    if (status == LSTUB_OK)
        status = give_end(b, site, arm, length, err);
    if (status < 0) {
        lstub__barrel_free(b);
        return status;
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

void lstub__barrel_media(const lstub__barrel *barrel, double f, cplx *eps)
{
    cplx lambda = lstub__wideband_lambda(f);
    for (int i = 0; i < barrel->media; i++)
        eps[i] = lstub__wideband_at(barrel->law[i], lambda);
}
