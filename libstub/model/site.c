#include "model/site.h"

#include <math.h>
#include <stddef.h>
#include <string.h>

/* Errors of the first notch found on the 24 full-wave cells, rounded up: tests/reference, docs/theory.md. */
#define BULK_ERROR   0.70
#define LOADED_ERROR 0.20

int32_t lstub__options_take(lstub_model_options *ours, const lstub_model_options *theirs, lstub_error *err)
{
    static const lstub__range Z_REF = {0.0, 1e4, 1, "ohm"};
    int32_t status;
    if (theirs == NULL)
        LSTUB_INIT(*ours);
    else if ((status = lstub__take(ours, sizeof *ours, theirs, sizeof *ours, "options", err)) < 0)
        return status;
    if (ours->fidelity == LSTUB_FIDELITY_DEFAULT)
        ours->fidelity = LSTUB_FIDELITY_CAVITY;
    if (ours->annuli == 0)
        ours->annuli = 4;
    if (ours->z_ref == 0.0)
        ours->z_ref = 50.0;
    if (ours->fidelity < LSTUB_FIDELITY_BULK || ours->fidelity > LSTUB_FIDELITY_CAVITY)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "fidelity", -1, "fidelity = %ld: must be one of LSTUB_FIDELITY_...", (long)ours->fidelity);
    if (ours->annuli < 2 || ours->annuli > 12)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "annuli", -1, "annuli = %ld: must be >= 2 and <= 12", (long)ours->annuli);
    if (ours->reserved != 0 || ours->reserved2 != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld, reserved2 = %ld: must be 0", (long)ours->reserved,
                           (long)ours->reserved2);
    return lstub__check(ours->z_ref, &Z_REF, "z_ref", err);
}

/* ---- capacitance of a region between two planes -------------------------------------------------- */

typedef struct mix {            /* dielectric between two depths, at 1 GHz and over frequency, in plane   */
    double height, constant, slope, in_plane, through_plane;
} mix;

static void mix_add(mix *m, const lstub__layer *layer, double lambda)
{
    double h = layer->thickness, ratio = layer->dielectric.in_plane_ratio, dk = layer->eps.constant + layer->eps.slope * lambda;
    m->height += h;
    m->constant += h * ratio * layer->eps.constant;
    m->slope += h * ratio * layer->eps.slope;
    m->in_plane += h * ratio * dk;
    m->through_plane += h / dk;
}

static void mix_done(mix *m)
{
    m->constant /= m->height;
    m->slope /= m->height;
    m->in_plane /= m->height;
    m->through_plane = m->height / m->through_plane;
}

/*
** Antipad that a plane with round holes would need to act like one slot around both barrels of a pair in odd (sign -1) or even
** mode: fit (0.2 %) to static two-dimensional solutions of such a slot, valid for pitch/(antipad + 0.44 h) > 0.8.
*/
double lstub__slot_antipad(const lstub_via *via, double antipad, double height, double sign)
{
    double d = log(2.0) / LSTUB_PI * height, r = 0.5 * antipad + d, al2 = 0.25 * via->drill * via->drill / (r * r), t = 0.5 * via->pair_pitch / r;
    double factor = sign < 0.0 ? 1.118 - 0.040 * al2 - (1.883 - 0.559 * al2) * exp(-3.174 * t)
                               : 1.118 - 0.042 * al2 + (2.068 - 2.812 * al2) * exp(-3.134 * t);
    return 2.0 * (r * factor - d);
}

static double seen_antipad(const lstub__via *via, double antipad, double height)
{
    if (via->in.pair_kind != LSTUB_PAIR_SHARED)
        return antipad;
    double slot = lstub__slot_antipad(&via->in, antipad, height, -1.0);
    return slot > 1.02 * via->in.drill ? slot : 1.02 * via->in.drill;
}

typedef struct region {         /* what the capacitance between a barrel and the planes around it hangs on */
    double above, below, height, through_plane, in_plane;   /* antipads, 0: no plane                          */
    double per_metre;                                       /* F/m                                            */
} region;

#define REGIONS 4               /* kept: boards repeat a few cavities */

typedef struct region_memory {
    region  kept[REGIONS];
    int     next;
    int32_t status;             /* of the first capacitance that could not be computed */
    lstub_error *err;
} region_memory;

/* Barrel to one plane; 0 for an antipad of 0. */
static double to_plane(const lstub__via *via, double antipad, double height, const region *r, region_memory *memory)
{
    double c = 0.0;
    if (antipad > 0.0 && memory->status == LSTUB_OK)
        memory->status = lstub_plate_capacitance(via->in.drill, seen_antipad(via, antipad, height), height, r->through_plane,
                                                 r->in_plane, &c, memory->err);
    return c;
}

/* Capacitance per metre of barrel between the planes above and below; open on one side: mirrored there. */
static double region_capacitance(const lstub__via *via, double above, double below, const mix *m, region_memory *memory)
{
    region r = {above, below, m->height, m->through_plane, m->in_plane, 0.0};
    for (int i = 0; i < REGIONS; i++)
        if (memcmp(&memory->kept[i], &r, offsetof(region, per_metre)) == 0)
            return memory->kept[i].per_metre;
    if (above > 0.0 && below > 0.0) {
        double upper = to_plane(via, above, r.height, &r, memory);
        r.per_metre = (upper + (above == below ? upper : to_plane(via, below, r.height, &r, memory))) / r.height;
    } else {
        r.per_metre = to_plane(via, above > 0.0 ? above : below, 2.0 * r.height, &r, memory) / r.height;
    }
    memory->kept[memory->next++ % REGIONS] = r;
    return r.per_metre;
}

#define WIDEST_PAD 1.02        /* antipad over pad, at least, in the next: a pad beyond it faces the plane instead */

/* What a pad adds to a bare barrel over `height`, in an antipad. */
static double wider_barrel(const lstub__via *via, double pad, double antipad, double height, double dk)
{
    return 2.0 * LSTUB_PI * LSTUB_EPS0 * dk * height * (1.0 / log(antipad / pad) - 1.0 / log(antipad / via->in.drill));
}

/* ---- one arm of the barrel ----------------------------------------------------------------------- */

/* Nearest plane from `layer` in direction `step`, within the barrel: its index, or -1. */
static int32_t next_plane(const lstub__via *via, int32_t layer, int32_t step)
{
    for (int32_t i = layer + step; i >= via->in.start_layer && i <= via->in.end_layer; i += step)
        if (lstub__is_copper(via->stackup->layer[i].kind) && lstub__via_antipad(via, i) > 0.0)
            return i;
    return -1;
}

static double antipad_at(const lstub__via *via, int32_t layer) { return layer < 0 ? 0.0 : lstub__via_antipad(via, layer); }

typedef struct walk {          /* the region that a layer lies in, kept while walking outwards */
    int32_t inner, outer;      /* planes that bound it, -1: none */
    mix     fill;
    double  per_metre;
    double  antipad;           /* the smaller of the two, 0: none */
    int     lossless;
} walk;

static void enter_region(walk *w, const lstub__via *via, int32_t layer, int32_t step, double lambda, region_memory *memory)
{
    const lstub_stackup *s = via->stackup;
    w->inner = next_plane(via, layer, -step);
    w->outer = next_plane(via, layer, step);
    int32_t low = w->inner < 0 ? (step > 0 ? via->in.start_layer : via->in.end_layer) : w->inner + step;
    int32_t high = w->outer < 0 ? (step > 0 ? via->in.end_layer : via->in.start_layer) : w->outer - step;
    memset(&w->fill, 0, sizeof w->fill);
    w->lossless = 1;
    for (int32_t i = low; step > 0 ? i <= high : i >= high; i += step) {
        mix_add(&w->fill, &s->layer[i], lambda);
        w->lossless &= s->layer[i].dielectric.loss_tangent == 0.0;
    }
    mix_done(&w->fill);
    double a = antipad_at(via, w->inner), b = antipad_at(via, w->outer);
    w->per_metre = region_capacitance(via, a, b, &w->fill, memory);
    w->antipad = a > 0.0 && (b == 0.0 || a < b) ? a : b;
}

static void add_range(lstub__arm *arm, double length, double dk)
{
    double f = length > 0.0 ? 0.1 * LSTUB_C0 / (length * sqrt(dk)) : HUGE_VAL;
    if (f < arm->f_range)
        arm->f_range = f;
}

/* Fringe of a pad towards its plane's rim beyond the copper's thickness, on each face: chosen on full-wave cell C04. */
static double pad_fringe(double pad, double antipad) { return (antipad - pad) / 8.0; }

static void plane_part(lstub__part *part, const lstub__via *via, int32_t index, double lambda)
{
    const lstub__layer *layer = &via->stackup->layer[index];
    double antipad = seen_antipad(via, part->plane, layer->thickness), pad = lstub__via_pad(via, index);
    double ratio = layer->dielectric.in_plane_ratio;
    mix own = {0.0, ratio * layer->eps.constant, ratio * layer->eps.slope, 0.0, 0.0};
    own.in_plane = own.constant + own.slope * lambda;
    double c = 2.0 * LSTUB_PI * LSTUB_EPS0 * own.in_plane / log(antipad / via->in.drill);
    part->c_constant = c * own.constant / own.in_plane;
    part->c_slope = c * own.slope / own.in_plane;
    if (pad > via->in.drill) {
        c = wider_barrel(via, pad, fmax(antipad, WIDEST_PAD * pad), layer->thickness + 2.0 * pad_fringe(pad, part->plane), own.in_plane);
        part->pad_constant = c * own.constant / own.in_plane;
        part->pad_slope = c * own.slope / own.in_plane;
    }
}

static void region_part(lstub__part *part, const lstub__via *via, int32_t index, const walk *w)
{
    const lstub__layer *layer = &via->stackup->layer[index];
    part->c_constant = w->per_metre * w->fill.constant / w->fill.in_plane;
    part->c_slope = w->per_metre * w->fill.slope / w->fill.in_plane;
    if (!lstub__is_copper(layer->kind) || w->antipad == 0.0)
        return;
    double pad = lstub__via_pad(via, index);
    if (pad > via->in.drill) {
        double c = wider_barrel(via, pad, fmax(w->antipad, WIDEST_PAD * pad), layer->thickness, w->fill.in_plane);
        part->pad_constant = c * w->fill.constant / w->fill.in_plane;
        part->pad_slope = c * w->fill.slope / w->fill.in_plane;
    }
}

/*
** Open end: a disc in free space has 8 eps0 r (textbook); its outer face has half of it, the ring around the barrel on
** its inner face the same in the laminate unless it stands in a plane's antipad, where the pad has been counted.
*/
static double end_capacitance(const lstub__via *via, int32_t end)
{
    double radius = 0.5 * via->in.drill, pad = 0.5 * lstub__via_pad(via, end), c;
    if (pad < radius)
        pad = radius;
    c = 4.0 * LSTUB_EPS0 * pad;
    if (lstub__via_antipad(via, end) == 0.0)
        c += 4.0 * LSTUB_EPS0 * via->stackup->layer[end].dielectric.dk * (pad - radius);
    return c;
}

static void make_arm(lstub__arm *arm, const lstub__via *via, int index, double lambda, region_memory *memory)
{
    const lstub_stackup *s = via->stackup;
    int32_t step = index == 0 ? -1 : 1, exit = index == 0 ? via->first : via->last;
    int32_t end = index == 0 ? via->in.start_layer : via->in.end_layer;
    double at = 0.0;
    walk w;
    int inside = 0;
    arm->count = 0;
    arm->f_range = HUGE_VAL;
    arm->lossless = 1;
    for (int32_t i = exit + step; exit != end && i != end + step; i += step) {
        const lstub__layer *layer = &s->layer[i];
        lstub__part *part = &arm->part[arm->count++];
        memset(part, 0, sizeof *part);
        part->from = at;
        part->to = at += layer->thickness;
        part->through_plane = layer->eps.constant + layer->eps.slope * lambda;
        part->in_plane = part->through_plane * layer->dielectric.in_plane_ratio;
        part->plane = lstub__is_copper(layer->kind) ? lstub__via_antipad(via, i) : 0.0;
        arm->lossless &= layer->dielectric.loss_tangent == 0.0;
        add_range(arm, 0.5 * part->plane, part->in_plane);
        arm->f_range = fmin(arm->f_range, lstub__wideband_top(layer->eps));
        if (part->plane > 0.0) {
            plane_part(part, via, i, lambda);
            inside = 0;
            continue;
        }
        if (!inside) {
            enter_region(&w, via, i, step, lambda, memory);
            add_range(arm, w.fill.height, w.fill.in_plane);
            arm->lossless &= w.lossless;
            inside = 1;
        }
        region_part(part, via, i, &w);
    }
    /* From the depths, like the length that a stub is given: the same bits. */
    arm->full = exit == end ? 0.0 : index == 0 ? s->layer[exit].top - s->layer[end].top : s->layer[end].bottom - s->layer[exit].bottom;
    arm->end_full = end_capacitance(via, end);
    arm->end_cut = 2.0 * LSTUB_EPS0 * via->in.drill;
}

/* ---- the via ------------------------------------------------------------------------------------- */

static void find_inductance(lstub__site *site, double lambda)
{
    const lstub_via *in = &site->via.in;
    site->radial_dk = 0.0;
    if (in->pair_kind != LSTUB_PAIR_NONE) {
        lstub_twin_rod(in->drill, in->pair_pitch, 1.0, &site->inductance, NULL, NULL);
    } else if (in->return_kind == LSTUB_RETURN_VIAS) {
        double s = 2.0 * in->return_distance;     /* as lstub_return_inductance; given places need no circle */
        site->inductance = LSTUB_MU0 / (2.0 * LSTUB_PI)
                           * (log(s / in->drill) + log(s / (in->return_count * in->return_drill)) / in->return_count);
    } else if (in->return_kind == LSTUB_RETURN_WALL) {
        site->inductance = LSTUB_MU0 / (2.0 * LSTUB_PI) * log(2.0 * in->return_distance / in->drill);
    } else {
        mix all;
        memset(&all, 0, sizeof all);
        for (int32_t i = in->start_layer + 1; i < in->end_layer; i++)
            if (!lstub__is_copper(site->via.stackup->layer[i].kind))
                mix_add(&all, &site->via.stackup->layer[i], lambda);
        mix_done(&all);
        site->radial_dk = all.through_plane;
        site->inductance = 0.0;
    }
}

/* The smallest antipad of the barrel, which the bulk fidelity takes for a coaxial line. */
static double smallest_antipad(const lstub__via *via)
{
    double least = 0.0;
    for (int32_t i = next_plane(via, via->in.start_layer - 1, 1); i >= 0; i = next_plane(via, i, 1)) {
        double antipad = lstub__via_antipad(via, i);
        if (least == 0.0 || antipad < least)
            least = antipad;
    }
    return least;
}

int32_t lstub__site_make(lstub__site *site, const lstub_stackup *stackup, const lstub_via *via,
                         const lstub_model_options *options, lstub_error *err)
{
    int32_t status = lstub__site_any(site, stackup, via, options, err);
    if (status >= 0 && site->via.unequal)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "partner_own", -1, "partner_own = 1: a pair whose barrels end at different depths has no odd mode of "
                           "its own; a transition computes it");
    return status;
}

int32_t lstub__site_any(lstub__site *site, const lstub_stackup *stackup, const lstub_via *via,
                        const lstub_model_options *options, lstub_error *err)
{
    lstub_model_options ours;
    int32_t status;
    if ((status = lstub__options_take(&ours, options, err)) < 0 || (status = lstub__via_take(&site->via, stackup, via, err)) < 0)
        return status;
    site->fidelity = ours.fidelity;
    site->z_ref = ours.z_ref;
    site->annuli = ours.annuli;
    site->bit = site->via.in.drill + 0.2e-3;    /* common practice, no source */
    if ((status = lstub__allocator(ours.allocator, &site->alloc, err)) < 0)
        return status;
    site->bulk_antipad = smallest_antipad(&site->via);
    if (site->bulk_antipad == 0.0)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "antipad", -1, "antipad: the barrel passes no plane: its capacitance is not known");
    double lambda = lstub__wideband_lambda(1e9).re;
    region_memory memory;
    memset(&memory, 0, sizeof memory);
    memory.err = err;
    find_inductance(site, lambda);
    for (int i = 0; i < 2; i++) {
        lstub__arm *arm = &site->arm[i];
        make_arm(arm, &site->via, i, lambda, &memory);
        arm->length = i == 0 ? stackup->layer[site->via.first].top - site->via.ends.top
                             : site->via.ends.bottom - stackup->layer[site->via.last].bottom;
        if (arm->count == 0 || arm->length <= LSTUB__SLACK)
            arm->length = 0.0;
    }
    return memory.status;
}

static void loaded_line(const lstub__site *site, const lstub__arm *arm, double length, lstub__line *line)
{
    double constant = 0.0, slope = 0.0;
    for (int i = 0; i < arm->count && arm->part[i].from < length; i++) {
        const lstub__part *part = &arm->part[i];
        double h = fmin(part->to, length) - part->from;
        int padded = length >= 0.5 * (part->from + part->to);
        constant += h * part->c_constant + (padded ? part->pad_constant : 0.0);
        slope += h * part->c_slope + (padded ? part->pad_slope : 0.0);
    }
    line->c_constant = constant / length;
    line->c_slope = slope / length;
    line->c_end = length < arm->full ? arm->end_cut : arm->end_full;
    line->inductance = site->inductance;
    line->radial_dk = site->radial_dk;
    line->stated_error = LOADED_ERROR;
    line->lossless = arm->lossless && site->radial_dk == 0.0;
}

/* The laminate's own Dk and a coaxial impedance; loss as the layers' mean. */
static void bulk_line(const lstub__site *site, const lstub__arm *arm, double length, lstub__line *line)
{
    const lstub__via *via = &site->via;
    double series = 0.0, constant = 0.0, slope = 0.0, lambda = lstub__wideband_lambda(1e9).re, spread = 0.0;
    int32_t step = arm == &site->arm[0] ? -1 : 1, exit = step < 0 ? via->first : via->last;
    for (int i = 0; i < arm->count && arm->part[i].from < length; i++) {
        double h = fmin(arm->part[i].to, length) - arm->part[i].from;
        const lstub__layer *layer = &via->stackup->layer[exit + step * (i + 1)];
        series += h / arm->part[i].through_plane;
        constant += h * layer->eps.constant;
        slope += h * layer->eps.slope;
    }
    double dk = length / series, mean = (constant + slope * lambda) / length;
    spread = log(site->bulk_antipad / via->in.drill);
    double c = 2.0 * LSTUB_PI * LSTUB_EPS0 * dk / spread;
    line->c_constant = c * constant / (length * mean);
    line->c_slope = c * slope / (length * mean);
    line->c_end = 0.0;
    line->inductance = LSTUB_MU0 / (2.0 * LSTUB_PI) * spread;
    line->radial_dk = 0.0;
    line->stated_error = BULK_ERROR;
    line->lossless = arm->lossless;
}

void lstub__site_line(const lstub__site *site, int arm, double length, lstub__line *line)
{
    line->length = length;
    line->radius = 0.5 * site->via.in.drill;
    line->f_range = site->arm[arm].f_range;
    if (site->fidelity == LSTUB_FIDELITY_BULK)
        bulk_line(site, &site->arm[arm], length, line);
    else
        loaded_line(site, &site->arm[arm], length, line);
}
