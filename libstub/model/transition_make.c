/* A transition from a stackup, a via and its ports: checks, lines, launches, models. */
#include "model/transition.h"

#include <math.h>
#include <string.h>

#define TOP_FREQUENCY 200e9

static const lstub__range LINE_IMPEDANCE = {1.0, 1000.0, 0, "ohm"};
static const lstub__range LINE_DK = {1.0, 1000.0, 0, ""};
static const lstub__range LINE_LOSS = {0.0, 0.5, 0, ""};
static const lstub__range TABLE = {1e9, TOP_FREQUENCY, 0, "Hz"};

/* ---- ports -------------------------------------------------------------------------------------- */

static int32_t take_trace(lstub__way *w, const lstub_port *p, double *width, lstub_error *err)
{
    static const lstub__range WIDTH = {0.0, 0.01, 0, "m"};
    int32_t status;
    *width = p->width;
    w->has_trace = p->trace != NULL;
    if (p->trace != NULL) {
        if (p->impedance != 0.0 || p->dk != 0.0 || p->loss_tangent != 0.0 || p->width != 0.0)
            return lstub__fail(err, LSTUB_E_GEOMETRY, "trace", -1, "trace: impedance, dk, loss_tangent and width must be 0 beside it");
        if ((status = lstub__trace_take(&w->trace, p->trace, err)) < 0) {
            lstub__fail_where(err, -1, "trace");
            return status;
        }
        *width = p->trace->width;
        return LSTUB_OK;
    }
    w->impedance = p->impedance;
    w->dk = p->dk == 0.0 ? 1.0 : p->dk;
    w->loss_tangent = p->loss_tangent;
    if ((status = lstub__check(w->impedance, &LINE_IMPEDANCE, "impedance", err)) < 0 || (status = lstub__check(w->dk, &LINE_DK, "dk", err)) < 0
        || (status = lstub__check(w->loss_tangent, &LINE_LOSS, "loss_tangent", err)) < 0)
        return status;
    return lstub__check(p->width, &WIDTH, "width", err);
}

/* Nearest planes above and below a layer within the barrel: antipad radius, and distance between faces; 0: none. */
static void planes_at(const lstub__via *via, int32_t layer, double *above, double *below, double *distance)
{
    const lstub_stackup *s = via->stackup;
    double top = 0.0, bottom = 0.0;
    *above = *below = 0.0;
    for (int32_t i = layer - 1; i >= via->in.start_layer && *above == 0.0; i--)
        if (lstub__is_copper(s->layer[i].kind) && (*above = 0.5 * lstub__via_antipad(via, i)) > 0.0)
            top = s->layer[i].bottom;
    for (int32_t i = layer + 1; i <= via->in.end_layer && *below == 0.0; i++)
        if (lstub__is_copper(s->layer[i].kind) && (*below = 0.5 * lstub__via_antipad(via, i)) > 0.0)
            bottom = s->layer[i].top;
    *distance = *above > 0.0 && *below > 0.0 ? bottom - top : 0.0;
}

/*
** Between the pad's rim and the antipads' no plane faces the trace: a series inductance and a missing capacitance. Fitted
** (5 %) to 20 static 3-D solutions: equal antipads, centred trace, planes 0.15 to 0.4 mm apart, antipads of 0.3 to 0.55 mm radius. The
** full-wave references want 12 to 25 % more inductance than these; LAUNCH_MORE was chosen with them in view.
*/
#define LAUNCH_MORE 1.15

static int32_t give_launch(lstub__way *w, const lstub__via *via, int32_t layer, double width, double rim)
{
    double above, below, h;
    planes_at(via, layer, &above, &below, &h);
    if (above == 0.0 || below == 0.0)
        return LSTUB_REMARK_OUTER;
    if (width == 0.0)
        return 0;
    double r = 0.5 * (above + below), a = 0.5 * via->in.drill;
    w->launch_l = LAUNCH_MORE * LSTUB_MU0 * (0.229 * r - 0.051 * h - 0.079 * width - 0.073 * a);
    w->launch_c = hypot(0.60 * (r - rim), 0.24 * h);
    int inside = r >= 0.3e-3 && r <= 0.55e-3 && h >= 0.15e-3 && h <= 0.4e-3 && fabs(above - below) <= 1e-6 && rim < r;
    return inside ? 0 : LSTUB_REMARK_LAUNCH;
}

static int32_t take_port(lstub__way *w, const lstub__via *via, const lstub_port *p, int32_t *remarks, lstub_error *err)
{
    lstub__range distance = {0.0, 1.0, 0, "m"};
    double width, rim = 0.5 * fmax(via->in.drill, lstub__via_pad(via, p->layer));
    int32_t status;
    if (p->kind != LSTUB_PORT_TRACE && p->kind != LSTUB_PORT_COAX)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "kind", -1, "kind = %ld: must be one of LSTUB_PORT_...", (long)p->kind);
    if (p->layer < via->in.start_layer || p->layer > via->in.end_layer || !lstub__via_connects(via, p->layer))
        return lstub__fail(err, LSTUB_E_GEOMETRY, "layer", -1, "layer = %ld '%s': is not one that the via connects", (long)p->layer,
                           p->layer >= 0 && p->layer < via->stackup->count ? via->stackup->layer[p->layer].name : "");
    w->kind = p->kind;
    w->z_ref = p->z_ref == 0.0 ? 50.0 : p->z_ref;
    if ((status = lstub__check(w->z_ref, &LINE_IMPEDANCE, "z_ref", err)) < 0)
        return status;
    if (p->kind == LSTUB_PORT_COAX) {
        w->dk = p->dk == 0.0 ? 1.0 : p->dk;
        if (p->trace != NULL || p->impedance != 0.0 || p->loss_tangent != 0.0 || p->width != 0.0 || p->distance != 0.0)
            return lstub__fail(err, LSTUB_E_GEOMETRY, "kind", -1, "kind = LSTUB_PORT_COAX: trace, impedance, loss_tangent, width and distance must be 0");
        if (p->layer != via->in.start_layer)
            return lstub__fail(err, LSTUB_E_UNSUPPORTED, "layer", -1, "layer = %ld '%s': a coaxial port is computed on the layer the barrel begins on, "
                               "%ld '%s'", (long)p->layer, via->stackup->layer[p->layer].name, (long)via->in.start_layer,
                               via->stackup->layer[via->in.start_layer].name);
        if (lstub__via_antipad(via, p->layer) == 0.0)
            return lstub__fail(err, LSTUB_E_GEOMETRY, "layer", -1, "layer %ld '%s': a coaxial port needs a plane with an antipad there", (long)p->layer,
                               via->stackup->layer[p->layer].name);
        return lstub__check(w->dk, &LINE_DK, "dk", err);
    }
    if (lstub__via_antipad(via, p->layer) > 0.0)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "layer", -1, "layer %ld '%s': a trace that leaves within a plane is not computed; set this layer's "
                           "antipad to 0", (long)p->layer, via->stackup->layer[p->layer].name);
    if ((status = take_trace(w, p, &width, err)) < 0)
        return status;
    distance.low = p->distance == 0.0 ? 0.0 : rim;
    if ((status = lstub__check(p->distance, &distance, "distance", err)) < 0)
        return status;
    w->length = p->distance == 0.0 ? 0.0 : p->distance - rim;
    *remarks |= give_launch(w, via, p->layer, width, rim);
    return LSTUB_OK;
}

static int32_t take_ports(lstub_transition *t, const lstub__via *via, const lstub_port *ports, size_t count, size_t stride,
                          lstub__passage *way, lstub_error *err)
{
    int32_t layer[LSTUB__WAYS], status;
    memset(way, 0, sizeof *way);
    for (size_t i = 0; i < count; i++) {
        lstub_port p;
        const void *theirs = (const char *)ports + i * stride;
        status = lstub__take(&p, sizeof p, theirs, sizeof p, "ports", err);
        if (status == LSTUB_OK)
            status = take_port(&t->way[i], via, &p, &t->remarks, err);
        for (size_t k = 0; k < i && status == LSTUB_OK; k++)
            if (layer[k] == p.layer)
                status = lstub__fail(err, LSTUB_E_GEOMETRY, "layer", -1, "layer = %ld '%s': has port %lu already", (long)p.layer,
                                     via->stackup->layer[p.layer].name, (unsigned long)k);
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "ports[%lu]", (unsigned long)i);
            return status;
        }
        layer[i] = p.layer;
        if (p.kind == LSTUB_PORT_COAX) {
            way->fed = 1;
            way->feed_dk = t->way[i].dk;
        }
    }
    t->ways = (int)count;
    for (size_t i = 0; i < count; i++) {
        int before = 0;
        for (size_t k = 0; k < count; k++)
            before += layer[k] < layer[i];
        t->way[i].place = before;                /* the feed is on the first layer */
    }
    for (size_t i = 0; i < count; i++)
        if (t->way[i].kind == LSTUB_PORT_TRACE)
            way->layer[t->way[i].place - way->fed] = layer[i];
    way->taps = (int)count - way->fed;
    if (way->taps > LSTUB__CAV_TAPS)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "count", -1, "count = %lu: more than %d traces on a barrel are not computed", (unsigned long)count,
                           LSTUB__CAV_TAPS);
    return LSTUB_OK;
}

/* ---- models ------------------------------------------------------------------------------------- */

static int32_t compile(lstub_transition *t, const lstub__site *site, const lstub__passage *way, int which, lstub_error *err)
{
    lstub__cav_options options = {site->annuli, 0, TOP_FREQUENCY};
    cplx eps[LSTUB__CAV_MEDIA];
    int32_t status = lstub__barrel_whole(&t->barrel[which], site, way, err);
    if (status < 0)
        return status;
    int failed = lstub__cavity_compile(&t->barrel[which]->shape, &options, site->alloc.allocate, site->alloc.release, site->alloc.user,
                                       &t->cavity[which]);
    if (failed == -1)
        return lstub__fail(err, LSTUB_E_MEMORY, "allocator", -1, "out of memory: a cavity model");
    if (failed == -3)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "ports", -1, "ports: a trace leaves where there is no barrel");
    if (failed != 0)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "via", -1, "via: the barrel has more layers, rims, media or annuli than the cavity model takes");
    lstub__barrel_media(t->barrel[which], 1e9, eps);
    t->f_top = fmin(t->f_top, lstub__cavity_limit(t->cavity[which], eps));
    return LSTUB_OK;
}

static int has_edges(const lstub_via *in) { return in->edges[0] > 0.0; }

static int32_t find_remarks(const lstub__via *via, int two)
{
    const lstub_via *in = &via->in;
    int32_t remarks = two ? LSTUB_REMARK_UNEQUAL : 0;
    if (in->return_kind == LSTUB_RETURN_NONE && in->pair_kind == LSTUB_PAIR_NONE && !has_edges(in))
        remarks |= LSTUB_REMARK_RADIATES;
    if (in->pair_kind == LSTUB_PAIR_SHARED) {
        double h = 0.2e-3, largest = 0.0;
        for (int32_t i = in->start_layer; i <= in->end_layer; i++) {
            double pad = lstub__via_pad(via, i);
            if (!lstub__is_copper(via->stackup->layer[i].kind)) {
                h = via->stackup->layer[i].thickness;
                continue;
            }
            largest = fmax(largest, lstub__via_antipad(via, i) + 0.44 * h);
            if (pad > 0.0 && fabs(pad - 0.45e-3) > 0.05e-3)
                remarks |= LSTUB_REMARK_SLOT;
        }
        if (in->pair_pitch < 0.8 * largest || fabs(in->drill - 0.25e-3) > 0.03e-3)
            remarks |= LSTUB_REMARK_SLOT;
    }
    return remarks;
}

int32_t lstub_transition_create(const lstub_stackup *stackup, const lstub_via *via, const lstub_port *ports, size_t count,
                                size_t stride, const lstub_transition_options *options, const lstub_allocator *allocator,
                                lstub_transition **out, lstub_error *err)
{
    lstub_transition_options ours;
    lstub_model_options plain;
    lstub__passage way;
    lstub_allocator alloc;
    lstub__site site;
    int32_t status;
    LSTUB_INIT(ours);
    if (lstub__need(out, "out", err) < 0 || lstub__need(ports, "ports", err) < 0)
        return LSTUB_E_NULL;
    if (count < 1 || count > LSTUB__WAYS)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "count", -1, "count = %lu: must be >= 1 and <= %d", (unsigned long)count, LSTUB__WAYS);
    if ((status = lstub__stride(stride, sizeof *ports, "ports", err)) < 0
        || (options != NULL && (status = lstub__take(&ours, sizeof ours, options, sizeof ours, "options", err)) < 0)
        || (status = lstub__allocator(allocator, &alloc, err)) < 0)
        return status;
    if (ours.stubs != LSTUB_STUBS_KEPT && ours.stubs != LSTUB_STUBS_REMOVED)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "stubs", -1, "stubs = %ld: must be one of LSTUB_STUBS_...", (long)ours.stubs);
    if (ours.metal != LSTUB_METAL_LOSSY && ours.metal != LSTUB_METAL_PERFECT)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "metal", -1, "metal = %ld: must be one of LSTUB_METAL_...", (long)ours.metal);
    if (ours.reserved != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld: must be 0", (long)ours.reserved);
    if (ours.f_table != 0.0 && (status = lstub__check(ours.f_table, &TABLE, "f_table", err)) < 0)
        return status;
    LSTUB_INIT(plain);
    plain.annuli = ours.annuli;
    if ((status = lstub__site_any(&site, stackup, via, &plain, err)) < 0)
        return status;
    site.alloc = alloc;
    lstub_transition *t = lstub__new(&alloc, 1, sizeof *t, err);
    if (t == NULL)
        return LSTUB_E_MEMORY;
    t->alloc = alloc;
    t->f_top = TOP_FREQUENCY;
    t->perfect = ours.metal == LSTUB_METAL_PERFECT;
    status = take_ports(t, &site.via, ports, count, stride, &way, err);
    way.removed = ours.stubs == LSTUB_STUBS_REMOVED;
    int pair = site.via.in.pair_kind != LSTUB_PAIR_NONE, two = pair && ((site.via.unequal && !way.removed) || !lstub__pair_even(&site.via.in));
    t->modes = !pair ? 1 : two ? 0 : 2;
    t->remarks |= find_remarks(&site.via, two);
    for (int i = 0; status == LSTUB_OK && i < (t->modes == 2 ? 2 : 1); i++) {
        way.sign = t->modes == 2 ? (i == 0 ? -1.0 : 1.0) : 0.0;
        status = compile(t, &site, &way, i, err);
    }
    t->size = t->modes == 1 ? t->ways : 2 * t->ways;
    if (status == LSTUB_OK && ours.f_table > 0.0)
        status = lstub__table_build(t, fmin(ours.f_table, t->f_top), err);
    if (status < 0) {
        lstub_transition_destroy(t);
        return status;
    }
    *out = t;
    if ((t->remarks & ~LSTUB_REMARK_RADIATES) == 0)
        return LSTUB_OK;
    for (int32_t bit = LSTUB_REMARK_LAUNCH; bit <= LSTUB_REMARK_UNEQUAL; bit *= 2)
        if (t->remarks & bit)
            return lstub__fail(err, LSTUB_W_RANGE, "ports", -1, "%s", lstub_remark_text(bit));
    return LSTUB_OK;
}

void lstub_transition_destroy(lstub_transition *t)
{
    if (t == NULL)
        return;
    lstub_allocator alloc = t->alloc;
    lstub__table_drop(t);
    for (int i = 0; i < 2; i++) {
        lstub__cavity_destroy(t->cavity[i]);
        lstub__barrel_free(t->barrel[i]);
    }
    lstub__free(&alloc, t);
}

const char *lstub_remark_text(int32_t remark)
{
    switch (remark) {
    case LSTUB_REMARK_RADIATES: return "no return via, partner or edge near: power leaves between the planes, notches are shallow";
    case LSTUB_REMARK_LAUNCH:   return "a trace leaves over antipads or between planes beyond the data its launch was fitted to";
    case LSTUB_REMARK_OUTER:    return "a trace leaves on an outer layer: derived, compared with nothing";
    case LSTUB_REMARK_SLOT:     return "a slot, its pads or drills are beyond the data it was fitted to";
    case LSTUB_REMARK_UNEQUAL:  return "two barrels of their own: the flux through the openings is left out";
    default:                    return "no remark";
    }
}
