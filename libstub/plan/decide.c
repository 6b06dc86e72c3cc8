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

/* 1 or 0, or a status < 0. */
static int32_t both_pass(const lstub__site *site, const lstub__room *room, double part, const lstub__demand *demand, lstub_error *err)
{
    lstub__branch branches[2];
    int32_t count, status = lstub__branches_make(branches, &count, site, worst_residual(&room[0], part), worst_residual(&room[1], part), err);
    if (status < 0)
        return status;
    int32_t pass = lstub__left_over(branches, count, site->z_ref, demand) >= 0.0;
    lstub__branches_done(branches, count);
    return pass;
}

/* Longest stub on an arm with the other cut to a length; 0: nothing there. */
static int32_t longest_beside(const lstub__site *site, int arm, double other, const lstub__demand *demand, double *length, lstub_error *err)
{
    lstub__branch branch;
    int32_t by, status = other > 0.0 ? lstub__branch_make(&branch, site, 1 - arm, other, err) : LSTUB_OK;
    if (status < 0)
        return status;
    status = lstub__longest(site, arm, other > 0.0 ? &branch : NULL, demand, length, &by, err);
    if (other > 0.0)
        lstub__branch_done(&branch);
    return status;
}

/* Not even the shortest residuals pass: the longer arm's is named against what it should be. */
static int32_t both_too_long(lstub_decision *d, const lstub__site *site, lstub__room *room, int longer, const lstub__demand *demand,
                             lstub_error *err)
{
    int32_t status = LSTUB_OK;
    if (room[longer].reason == LSTUB_REASON_FAILS) {
        room[longer].reason = LSTUB_REASON_LIMIT_TOO_SHORT;
        room[longer].value = worst_residual(&room[longer], 0.0);
        status = longest_beside(site, longer, worst_residual(&room[1 - longer], 0.0), demand, &room[longer].limit, err);
    }
    blame(d, longer, &room[longer]);
    return status;
}

/* The greatest part of both arms' rest that may stay; < 0: not even the shortest residuals pass. */
static int32_t part_of_both(lstub__circuit *k, const lstub__site *site, const lstub__room *room, const lstub__demand *demand, lstub_error *err)
{
    double least[2] = {worst_residual(&room[0], 0.0), worst_residual(&room[1], 0.0)}, good = 0.0, bad = 1.0;
    if (k->halved && k->least[0] == least[0] && k->least[1] == least[1])
        return LSTUB_OK;
    int32_t pass = both_pass(site, room, 0.0, demand, err);
    while (pass > 0 && bad - good > (site->fidelity <= LSTUB_FIDELITY_LOADED ? 1e-6 : 1e-4)) {
        double middle = 0.5 * (good + bad);
        int32_t here = both_pass(site, room, middle, demand, err);
        if (here < 0)
            return here;
        *(here ? &good : &bad) = middle;
    }
    if (pass < 0)
        return pass;
    k->halved = 1;
    k->least[0] = least[0];
    k->least[1] = least[1];
    k->part = pass > 0 ? good : -1.0;
    return LSTUB_OK;
}

/* Both sides: each may leave the same part of what it could. */
static int32_t drill_both(lstub__case *c, lstub__circuit *k, const lstub__site *site, const lstub__room *geometry,
                          const lstub__demand *demand, const lstub__capability *capability, lstub_error *err)
{
    lstub__room room[2] = {geometry[0], geometry[1]};
    int longer = site->arm[1].length >= site->arm[0].length;
    for (int turn = 0; turn < 2; turn++) {
        int arm = turn == 0 ? longer : 1 - longer;
        if (room[arm].low == HUGE_VAL) {
            blame(&c->decision, arm, &room[arm]);
            return LSTUB_OK;
        }
    }
    int32_t status = part_of_both(k, site, room, demand, err);
    if (status < 0)
        return status;
    if (k->part < 0.0)
        return both_too_long(&c->decision, site, room, longer, demand, err);
    for (int arm = 0; arm < 2; arm++) {
        double limit = worst_residual(&geometry[arm], k->part);
        lstub__room_limit(&room[arm], limit, capability);
        if (room[arm].low == HUGE_VAL) {
            blame(&c->decision, arm, &room[arm]);
            cut_of(&c->decision, 0)->drilled = 0;
            return LSTUB_OK;
        }
        record(c, site, arm, &room[arm], limit, capability);
    }
    c->decision.action = LSTUB_ACTION_DRILL_BOTH;
    c->decision.reason_side = LSTUB_SIDE_BOTH;
    return LSTUB_OK;
}

/* One drill where one is enough, the shorter cut first; else both; else why not. */
static int32_t drill(lstub__case *c, lstub__circuit *k, const lstub__site *site, const lstub__demand *demand,
                     const lstub__capability *capability, lstub_error *err)
{
    lstub__room geometry[2], room[2];
    int present[2], best = -1;
    for (int arm = 0; arm < 2; arm++) {
        present[arm] = site->arm[arm].length > 0.0;
        if (!present[arm])
            continue;
        lstub__room_make(&geometry[arm], site, arm, capability);
        room[arm] = geometry[arm];
        if (room[arm].low == HUGE_VAL)
            continue;
        int32_t status = k->limited[arm] ? LSTUB_OK : longest_beside(site, arm, site->arm[1 - arm].length, demand, &k->limit[arm], err);
        if (status < 0)
            return status;
        k->limited[arm] = 1;
        lstub__room_limit(&room[arm], k->limit[arm], capability);
        if (room[arm].low == HUGE_VAL)
            continue;
        if (best < 0 || room[arm].full - room[arm].high < room[best].full - room[best].high)
            best = arm;
    }
    c->decision.reason = LSTUB_REASON_FAILS;
    if (best >= 0) {
        record(c, site, best, &room[best], k->limit[best], capability);
        c->decision.action = best == 0 ? LSTUB_ACTION_DRILL_TOP : LSTUB_ACTION_DRILL_BOTTOM;
        c->decision.reason_side = lstub__side_of(best);
        return LSTUB_OK;
    }
    if (present[0] && present[1])
        return drill_both(c, k, site, geometry, demand, capability, err);
    blame(&c->decision, present[0] ? 0 : 1, &room[present[0] ? 0 : 1]);
    return LSTUB_OK;
}

static lstub__site *with_bit(lstub__site *site, const lstub__capability *capability)
{
    site->bit = site->via.in.drill + capability->in.bit_oversize;
    return site;
}

static void refuse(lstub_decision *d, int32_t status)
{
    d->status = status;
    d->action = LSTUB_ACTION_REFUSED;
    d->reason = LSTUB_REASON_ERROR;
}

/* The via as it is. */
static int32_t judge_as_is(lstub__circuit *k, const lstub__site *site, const lstub__demand *demand, lstub_error *err)
{
    lstub__branch branches[2];
    int32_t status = LSTUB_OK;
    if (k->judged)
        return LSTUB_OK;
    if ((status = lstub__branches_make(branches, &k->count, site, site->arm[0].length, site->arm[1].length, err)) < 0)
        return status;
    k->judged_status = lstub__judge(branches, k->count, site->z_ref, demand, &k->before);
    lstub__branches_done(branches, k->count);
    k->judged = 1;
    return LSTUB_OK;
}

int32_t lstub__decide(lstub__case *out, lstub__circuit *circuit, const lstub_stackup *stackup, const lstub_job *job,
                      const lstub__capability *capability, const lstub_model_options *options, lstub_error *err)
{
    lstub_decision *d = &out->decision;
    lstub__site site;
    lstub__demand demand;
    int32_t status;
    LSTUB_INIT(*d);
    out->message = -1;
    out->notch_ratio = out->loss_db = out->aim[0] = out->aim[1] = 0.0;
    d->reason_layer = d->top.group = d->bottom.group = d->top.must_not_cut = d->bottom.must_not_cut = -1;
    d->reason_value = d->reason_limit = NAN;
    if (job->signal == NULL) {
        without_signal(d, stackup, job);
        return LSTUB_OK;
    }
    if ((status = lstub__demand_make(&demand, job->signal, job->criteria, err)) < 0
        || (status = lstub__site_make(&site, stackup, job->via, options, err)) < 0
        || (status = judge_as_is(circuit, with_bit(&site, capability), &demand, err)) < 0) {
        refuse(d, status);
        return status;
    }
    out->notch_ratio = demand.notch_ratio;
    out->loss_db = demand.loss_db;
    d->stub_top = site.arm[0].length;
    d->stub_bottom = site.arm[1].length;
    d->stub_count = circuit->count;
    d->status = circuit->judged_status;
    d->before = circuit->before;
    d->after = d->before;
    if (site.via.in.connect_count < 2 && site.via.in.pin_side == 0) {
        d->action = LSTUB_ACTION_NOT_JUDGED;
        d->reason = LSTUB_REASON_ONE_LAYER;
        d->reason_layer = site.via.first;
    } else if (d->before.pass) {
        d->action = LSTUB_ACTION_KEEP;
        d->reason = circuit->count == 0 ? LSTUB_REASON_NO_STUB : LSTUB_REASON_PASSES;
    } else if ((status = drill(out, circuit, &site, &demand, capability, err)) < 0) {
        refuse(d, status);
        return status;
    }
    return LSTUB_OK;
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

int32_t lstub__settle(lstub__case *out, lstub__circuit *circuit, const lstub_stackup *stackup, const lstub_job *job,
                      const lstub__capability *capability, const lstub_model_options *options, lstub_error *err)
{
    lstub_decision *d = &out->decision;
    lstub__site site;
    lstub__branch branches[2];
    lstub__demand demand;
    int32_t count, status;
    if (!d->top.drilled && !d->bottom.drilled)
        return LSTUB_OK;
    if ((status = lstub__demand_make(&demand, job->signal, job->criteria, err)) < 0
        || (status = lstub__site_make(&site, stackup, job->via, options, err)) < 0)
        return status;
    with_bit(&site, capability);
    double top = settle_side(&d->top, &site, 0, capability), bottom = settle_side(&d->bottom, &site, 1, capability);
    if (!circuit->settled || circuit->after_length[0] != top || circuit->after_length[1] != bottom) {
        if ((status = lstub__branches_make(branches, &count, &site, top, bottom, err)) < 0)
            return status;
        circuit->after_status = lstub__judge(branches, count, site.z_ref, &demand, &circuit->after);
        lstub__branches_done(branches, count);
        circuit->settled = 1;
        circuit->after_length[0] = top;
        circuit->after_length[1] = bottom;
    }
    d->after = circuit->after;
    if (circuit->after_status != LSTUB_OK)
        d->status = circuit->after_status;
    return LSTUB_OK;
}
