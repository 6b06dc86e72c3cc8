/* Where the tip of a back-drill may lie: the fabricator's limits against one side of a via. */
#include "plan/plan.h"

#include <math.h>

static double both(double drill, double stack_worst, double stack_rss, int32_t method)
{
    return method == LSTUB_TOLERANCE_RSS ? sqrt(drill * drill + stack_rss * stack_rss) : drill + stack_worst;
}

/* A bound on the residual from below; the one that binds gives the reason, should nothing be left. */
static void at_least(lstub__room *room, double residual, int32_t reason, int32_t layer, double value, double limit)
{
    if (residual <= room->low)
        return;
    room->low = residual;
    room->reason = reason;
    room->layer = layer;
    room->value = value;
    room->limit = limit;
}

static void refuse(lstub__room *room, int32_t reason)
{
    room->reason = reason;
    room->low = HUGE_VAL;
}

/* Copper beside the hole: the tip stays away from a layer where the bit would come too near to it. */
static void keep_off_copper(lstub__room *room, const lstub__site *site, int arm, const lstub_capability *fab)
{
    const lstub__via *via = &site->via;
    double needed = via->in.drill + fab->bit_oversize + 2.0 * fab->wall_clearance;
    int32_t step = arm == 0 ? -1 : 1, exit = arm == 0 ? via->first : via->last;
    for (int i = 0; i < site->arm[arm].count; i++) {
        int32_t layer = exit + step * (i + 1);
        if (!lstub__is_copper(via->stackup->layer[layer].kind))
            continue;
        double clear = lstub__via_clear(via, layer);
        if (clear >= 0.0 && clear < needed)
            at_least(room, site->arm[arm].part[i].to + room->shrink, LSTUB_REASON_WALL, layer,
                     0.5 * (clear - via->in.drill - fab->bit_oversize), fab->wall_clearance);
    }
}

/* A pin sits in the barrel from its own surface down: never drilled from there, and not too near from the other side.
** A soldered one fills the hole. */
static void keep_pin(lstub__room *room, const lstub__site *site, int arm)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    if (via->in.pin_side == 0)
        return;
    if (via->in.pin_side == lstub__side_of(arm) || via->in.pin_length == 0.0) {
        room->value = 0.0;
        room->limit = via->in.pin_length;
        refuse(room, LSTUB_REASON_PIN);
        return;
    }
    double above = arm == 0 ? s->layer[s->last_copper].bottom - s->layer[via->first].top
                            : s->layer[via->last].bottom - s->layer[s->first_copper].top;
    at_least(room, via->in.pin_length - above + room->shrink, LSTUB_REASON_PIN, -1, above, via->in.pin_length);
}

void lstub__room_make(lstub__room *room, const lstub__site *site, int arm, const lstub__capability *capability)
{
    const lstub__via *via = &site->via;
    const lstub_stackup *s = via->stackup;
    const lstub_capability *fab = &capability->in;
    int32_t surface = arm == 0 ? s->first_copper : s->last_copper;
    lstub_interval stack;
    room->reason = LSTUB_REASON_FAILS;
    room->layer = -1;
    room->value = room->limit = NAN;
    room->full = room->high = site->arm[arm].full;
    room->low = 0.0;
    if (arm == 0 ? via->ends.top_drilled : via->ends.bottom_drilled) {
        refuse(room, LSTUB_REASON_DRILLED);
        return;
    }
    if ((arm == 0 ? via->in.start_layer : via->in.end_layer) != surface) {
        refuse(room, LSTUB_REASON_BURIED);
        return;
    }
    if ((fab->sides & lstub__side_of(arm)) == 0) {
        refuse(room, LSTUB_REASON_SIDE);
        return;
    }
    double face = arm == 0 ? s->layer[via->first].top : s->layer[via->last].bottom;
    LSTUB_INIT(stack);
    lstub_stackup_interval(s, arm == 0 ? s->layer[surface].top : face, arm == 0 ? face : s->layer[surface].bottom, &stack, NULL);
    room->shrink = both(fab->depth_tolerance, stack.tol_minus, stack.tol_rss_minus, fab->tolerance_method);
    room->grow = both(fab->depth_tolerance, stack.tol_plus, stack.tol_rss_plus, fab->tolerance_method);
    room->low = fmax(fab->residual_min, fab->cut_clearance + room->shrink);
    if (room->low >= room->full) {
        room->value = room->full;
        room->limit = room->low;
        refuse(room, LSTUB_REASON_NO_ROOM);
        return;
    }
    keep_off_copper(room, site, arm, fab);
    if (fab->aspect_ratio > 0.0)
        at_least(room, room->full - fab->aspect_ratio * (via->in.drill + fab->bit_oversize), LSTUB_REASON_ASPECT, -1,
                 room->full / (via->in.drill + fab->bit_oversize), fab->aspect_ratio);
    keep_pin(room, site, arm);
}

/* Only allowed depths: from the least to the greatest of those that fit. */
static void keep_depths(lstub__room *room, const lstub__capability *capability)
{
    double least = HUGE_VAL, most = -1.0;
    for (size_t i = 0; i < capability->in.depth_count; i++) {
        double depth = capability->depths[i];
        if (depth >= room->depth_least && depth <= room->depth_most) {
            least = fmin(least, depth);
            most = fmax(most, depth);
        }
    }
    if (most < 0.0) {
        room->value = room->depth_least;
        room->limit = room->depth_most;
        refuse(room, LSTUB_REASON_DEPTHS);
        return;
    }
    room->depth_least = least;
    room->depth_most = most;
}

void lstub__room_limit(lstub__room *room, double longest, const lstub__capability *capability)
{
    if (room->low == HUGE_VAL)
        return;
    room->high = fmin(longest, room->full) - room->grow;
    if (room->low > room->high || longest <= 0.0) {
        if (room->reason == LSTUB_REASON_FAILS) {
            room->reason = LSTUB_REASON_LIMIT_TOO_SHORT;
            room->value = room->low + room->grow;
            room->limit = longest;
        }
        room->low = HUGE_VAL;
        return;
    }
    room->depth_least = room->full - room->high;
    room->depth_most = room->full - room->low;
    if (capability->in.depth_count > 0)
        keep_depths(room, capability);
    if (room->low != HUGE_VAL)
        room->reason = LSTUB_REASON_FAILS;
}
