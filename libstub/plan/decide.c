/* What to do about one via, before the depths of a board are shared out. */
#include "plan/plan.h"

#include <math.h>

static lstub_drill_cut *cut_of(lstub_decision *d, int arm) { return arm == 0 ? &d->top : &d->bottom; }

/* A via that is not judged: still its stubs, where the geometry is sound. */
static void without_signal(lstub_decision *d, const lstub_stackup *stackup, const lstub_job *job)
{
    lstub__via via;
    lstub_stub stub;
    d->action = LSTUB_ACTION_NOT_JUDGED;
    d->reason = LSTUB_REASON_NO_SIGNAL;
    if (lstub__via_take(&via, stackup, job->via, NULL) < 0)
        return;
    if (lstub__via_stub(&via, LSTUB_SIDE_TOP, &stub)) {
        d->stub_top = stub.length;
        d->stub_count++;
    }
    if (lstub__via_stub(&via, LSTUB_SIDE_BOTTOM, &stub)) {
        d->stub_bottom = stub.length;
        d->stub_count++;
    }
}

static void record(lstub__case *c, const lstub__site *site, int arm, const lstub__room *room, double limit,
                   const lstub__capability *capability)
{
    lstub_drill_cut *cut = cut_of(&c->decision, arm);
    cut->drilled = 1;
    cut->must_not_cut = arm == 0 ? site->via.first : site->via.last;
    cut->diameter = site->via.in.drill + capability->in.bit_oversize;
    cut->depth_least = room->depth_least;
    cut->depth_most = room->depth_most;
    cut->limit = limit;
    c->aim[arm] = fmin(fmax(room->full - capability->in.residual_target, room->depth_least), room->depth_most);
}

static void blame(lstub_decision *d, int arm, const lstub__room *room)
{
    d->action = LSTUB_ACTION_CANNOT;
    d->reason = room->reason;
    d->reason_side = lstub__side_of(arm);
    d->reason_layer = room->layer;
    d->reason_value = room->value;
    d->reason_limit = room->limit;
}

/* Residuals of both sides between their least (part 0) and the whole barrel (part 1), at their worst. */
static double worst_residual(const lstub__room *room, double part)
{
    double least = fmin(room->low + room->grow, room->full);
    return least + part * (room->full - least);
}

static int both_pass(const lstub__site *site, const lstub__room *room, double part, const lstub__demand *demand)
{
    lstub__line lines[2];
    int32_t count = lstub__cut_lines(site, worst_residual(&room[0], part), worst_residual(&room[1], part), lines);
    return lstub__left_over(lines, count, site->z_ref, demand) >= 0.0;
}

/* Both sides: each may leave the same part of what it could. */
static int drill_both(lstub__case *c, const lstub__site *site, const lstub__room *geometry, const lstub__demand *demand,
                      const lstub__capability *capability)
{
    lstub__room room[2] = {geometry[0], geometry[1]};
    int longer = site->arm[1].length >= site->arm[0].length;
    for (int k = 0; k < 2; k++) {
        int arm = k == 0 ? longer : 1 - longer;
        if (room[arm].low == HUGE_VAL) {
            blame(&c->decision, arm, &room[arm]);
            return 0;
        }
    }
    double good = 0.0, bad = 1.0;
    if (!both_pass(site, room, 0.0, demand)) {
        int32_t by;
        if (room[longer].reason == LSTUB_REASON_FAILS) {
            room[longer].reason = LSTUB_REASON_LIMIT_TOO_SHORT;
            room[longer].value = worst_residual(&room[longer], 0.0);
            room[longer].limit = lstub__longest(site, longer, worst_residual(&room[1 - longer], 0.0), demand, &by);
        }
        blame(&c->decision, longer, &room[longer]);
        return 0;
    }
    while (bad - good > 1e-6) {
        double middle = 0.5 * (good + bad);
        if (both_pass(site, room, middle, demand))
            good = middle;
        else
            bad = middle;
    }
    for (int arm = 0; arm < 2; arm++) {
        double limit = worst_residual(&geometry[arm], good);
        lstub__room_limit(&room[arm], limit, capability);
        if (room[arm].low == HUGE_VAL) {
            blame(&c->decision, arm, &room[arm]);
            cut_of(&c->decision, 0)->drilled = 0;
            return 0;
        }
        record(c, site, arm, &room[arm], limit, capability);
    }
    c->decision.action = LSTUB_ACTION_DRILL_BOTH;
    return 1;
}

/* One drill where one is enough, the shorter cut first; else both; else why not. */
static void drill(lstub__case *c, const lstub__site *site, const lstub__demand *demand, const lstub__capability *capability)
{
    lstub__room geometry[2], room[2];
    double limit[2] = {NAN, NAN};
    int present[2], best = -1;
    for (int arm = 0; arm < 2; arm++) {
        int32_t by;
        present[arm] = site->arm[arm].length > 0.0;
        if (!present[arm])
            continue;
        lstub__room_make(&geometry[arm], site, arm, capability);
        room[arm] = geometry[arm];
        if (room[arm].low == HUGE_VAL)
            continue;
        limit[arm] = lstub__longest(site, arm, site->arm[1 - arm].length, demand, &by);
        lstub__room_limit(&room[arm], limit[arm], capability);
        if (room[arm].low == HUGE_VAL)
            continue;
        if (best < 0 || room[arm].full - room[arm].high < room[best].full - room[best].high)
            best = arm;
    }
    c->decision.reason = LSTUB_REASON_FAILS;
    if (best >= 0) {
        record(c, site, best, &room[best], limit[best], capability);
        c->decision.action = best == 0 ? LSTUB_ACTION_DRILL_TOP : LSTUB_ACTION_DRILL_BOTTOM;
        c->decision.reason_side = lstub__side_of(best);
    } else if (present[0] && present[1]) {
        if (drill_both(c, site, geometry, demand, capability))
            c->decision.reason_side = LSTUB_SIDE_BOTH;
    } else {
        blame(&c->decision, present[0] ? 0 : 1, &room[present[0] ? 0 : 1]);
    }
}

void lstub__decide(lstub__case *out, const lstub_stackup *stackup, const lstub_job *job, const lstub__capability *capability,
                   const lstub_model_options *options, lstub_error *err)
{
    lstub_decision *d = &out->decision;
    lstub__site site;
    lstub__line lines[2];
    lstub__demand demand;
    int32_t count;
    LSTUB_INIT(*d);
    out->message = -1;
    out->notch_ratio = out->loss_db = out->aim[0] = out->aim[1] = 0.0;
    d->reason_layer = d->top.group = d->bottom.group = d->top.must_not_cut = d->bottom.must_not_cut = -1;
    d->reason_value = d->reason_limit = NAN;
    if (job->signal == NULL) {
        without_signal(d, stackup, job);
        return;
    }
    d->action = LSTUB_ACTION_REFUSED;
    d->reason = LSTUB_REASON_ERROR;
    if ((d->status = lstub__demand_make(&demand, job->signal, job->criteria, err)) < 0
        || (d->status = lstub__site_make(&site, stackup, job->via, options, err)) < 0)
        return;
    out->notch_ratio = demand.notch_ratio;
    out->loss_db = demand.loss_db;
    d->stub_top = site.arm[0].length;
    d->stub_bottom = site.arm[1].length;
    count = lstub__site_lines(&site, lines);
    d->stub_count = count;
    d->status = lstub__judge(lines, count, site.z_ref, &demand, &d->before);
    d->after = d->before;
    if (site.via.in.connect_count < 2 && site.via.in.pin_side == 0) {
        d->action = LSTUB_ACTION_NOT_JUDGED;
        d->reason = LSTUB_REASON_ONE_LAYER;
        d->reason_layer = site.via.first;
    } else if (d->before.pass) {
        d->action = LSTUB_ACTION_KEEP;
        d->reason = count == 0 ? LSTUB_REASON_NO_STUB : LSTUB_REASON_PASSES;
    } else {
        drill(out, &site, &demand, capability);
    }
}

static double settle_side(lstub_drill_cut *cut, const lstub__site *site, int arm, const lstub__capability *capability)
{
    lstub__room room;
    if (!cut->drilled)
        return site->arm[arm].length;
    lstub__room_make(&room, site, arm, capability);
    cut->residual = room.full - cut->depth;
    cut->residual_least = cut->residual - room.shrink;
    cut->residual_most = cut->residual + room.grow;
    return fmin(cut->residual_most, room.full);
}

void lstub__settle(lstub__case *out, const lstub_stackup *stackup, const lstub_job *job, const lstub__capability *capability,
                   const lstub_model_options *options)
{
    lstub_decision *d = &out->decision;
    lstub__site site;
    lstub__line lines[2];
    lstub__demand demand;
    if (!d->top.drilled && !d->bottom.drilled)
        return;
    lstub__demand_make(&demand, job->signal, job->criteria, NULL);
    lstub__site_make(&site, stackup, job->via, options, NULL);
    double top = settle_side(&d->top, &site, 0, capability), bottom = settle_side(&d->bottom, &site, 1, capability);
    int32_t status = lstub__judge(lines, lstub__cut_lines(&site, top, bottom, lines), site.z_ref, &demand, &d->after);
    if (status != LSTUB_OK)
        d->status = status;
}
