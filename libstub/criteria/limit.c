/* The inverse questions: how long a stub, how fast a signal. */
#include "criteria/criteria.h"
#include "num/root.h"

#include <math.h>

#define LENGTH_STEP   1e-9  /* m, to which a limit is found: far below any drill */
#define COMPILED_STEP 1e-7  /* m, where every length needs a model of its own    */

typedef struct cutting {
    const lstub__site *site;
    const lstub__demand *demand;
    int      arm;
    const lstub__branch *other;
    int      closed;           /* with the closed form in place of the branches                */
    int32_t *status;           /* of the first branch that could not be made */
    lstub_error *err;
} cutting;

/* The branch cut to a length and its neighbour; their number, 0 where it could not be made. */
static int32_t branches_at(const cutting *c, double length, lstub__branch *branches)
{
    if (c->closed) {
        lstub__branch_closed(&branches[0], c->site, c->arm, length);
        if (c->other != NULL)
            lstub__branch_closed(&branches[1], c->site, 1 - c->arm, c->other->length);
        return c->other == NULL ? 1 : 2;
    }
    if (*c->status == LSTUB_OK)
        *c->status = lstub__branch_make(&branches[0], c->site, c->arm, length, c->err);
    if (*c->status < 0)
        return 0;
    if (c->other == NULL)
        return 1;
    branches[1] = *c->other;
    return 2;
}

/* What is left of the tightest criterion, as a part of its limit: >= 0 passes. */
static double left_over(double length, const void *context)
{
    const cutting *c = context;
    lstub__branch branches[2];
    int32_t count = branches_at(c, length, branches);
    if (count == 0)
        return NAN;
    double left = lstub__left_over(branches, count, c->site->z_ref, c->demand);
    lstub__branch_done(&branches[0]);
    return left;
}

typedef struct scaled {        /* the closed form, its numbers scaled to what a better model said at one length */
    cutting *c;
    double   notch, loss;      /* factors of the first notch and of the added loss */
} scaled;

static void numbers(cutting *c, int closed, double length, double *f1, double *loss)
{
    lstub__branch branches[2];
    int32_t which;
    c->closed = closed;
    int32_t count = branches_at(c, length, branches);
    *f1 = count > 0 ? lstub__branches_first_notch(branches, count, c->site->z_ref, &which) : NAN;
    *loss = count > 0 ? lstub__branches_loss_db(branches, count, c->site->z_ref, c->demand->nyquist) : NAN;
    if (count > 0)
        lstub__branch_done(&branches[0]);
    c->closed = 0;
}

static double scaled_left_over(double length, const void *context)
{
    const scaled *s = context;
    double f1, loss;
    numbers(s->c, 1, length, &f1, &loss);
    f1 *= s->notch;
    double left = fmin(f1 / s->c->demand->least_f1 - 1.0, 4.0);
    if (s->c->demand->loss_db > 0.0 && f1 > s->c->demand->nyquist)
        left = fmin(left, 1.0 - s->loss * loss / s->c->demand->loss_db);
    return left;
}

/* Where the limit should lie: the closed form solved, compared with the model there, scaled, solved again. */
static double expected_limit(cutting *c, double step, double full)
{
    scaled s = {c, 1.0, 1.0};
    double x = NAN;
    for (int turn = 0; turn < 6 && *c->status == LSTUB_OK; turn++) {
        double good = step, bad = full, last = x, f1, loss, f1_closed, loss_closed;
        if (scaled_left_over(full, &s) >= 0.0)
            x = 0.98 * full;
        else
            x = lstub__bracket(scaled_left_over, &s, &good, &bad, 0.1 * step) ? good : 10.0 * step;
        if (fabs(x - last) < 0.5 * step)
            break;
        numbers(c, 0, x, &f1, &loss);
        numbers(c, 1, x, &f1_closed, &loss_closed);
        if (f1 < HUGE_VAL && f1_closed < HUGE_VAL)
            s.notch = f1 / f1_closed;
        if (loss > 0.0 && loss_closed > 0.0)
            s.loss = loss / loss_closed;
    }
    return x;
}

/*
** Brackets the limit: a length that passes and one that fails. Where lengths are dear, outwards from where it is expected.
** Returns 0 when even the shortest fails.
*/
static int bracket(cutting *c, double step, double *good, double *bad)
{
    double full = *bad;
    *good = step;
    if (c->site->fidelity <= LSTUB_FIDELITY_LOADED)
        return lstub__bracket(left_over, c, good, bad, step);
    double x = fmin(fmax(expected_limit(c, step, full), 2.0 * step), full - 2.0 * step), reach = 0.5 * step;
    if (left_over(x, c) >= 0.0) {
        for (*good = x; (x += reach) < full && left_over(x, c) >= 0.0; reach *= 8.0)
            *good = x;
        *bad = fmin(x, full);
    } else {
        for (*bad = x; (x -= reach) > step && !(left_over(x, c) >= 0.0); reach *= 8.0)
            *bad = x;
        *good = fmax(x, step);
    }
    return *c->status == LSTUB_OK && lstub__bracket(left_over, c, good, bad, step);
}

/* The answer passes, and a length a step above it fails; pads make small jumps in the curve. */
int32_t lstub__longest(const lstub__site *site, int arm, const lstub__branch *other, const lstub__demand *demand, double *length,
                       int32_t *limited_by, lstub_error *err)
{
    int32_t status = LSTUB_OK;
    cutting c = {site, demand, arm, other, 0, &status, err};
    double good, bad = site->arm[arm].full, step = site->fidelity <= LSTUB_FIDELITY_LOADED ? LENGTH_STEP : COMPILED_STEP;
    lstub_margin margin;
    lstub__branch branches[2];
    *limited_by = LSTUB_LIMIT_NONE;
    *length = bad;
    if (left_over(bad, &c) >= 0.0 || status < 0)
        return status;
    if (!bracket(&c, step, &good, &bad))
        good = 0.0;
    int32_t count = status < 0 ? 0 : branches_at(&c, bad, branches);
    if (count == 0)
        return status;
    lstub__judge(branches, count, site->z_ref, demand, &margin);
    lstub__branch_done(&branches[0]);
    *limited_by = margin.limited_by;
    *length = good;
    return LSTUB_OK;
}

static int32_t longest(const lstub_stackup *stackup, const lstub_via *via, int32_t side, const lstub_model_options *options,
                       const lstub_signal *signal, const lstub_criteria *criteria, lstub_stub_limit *out, lstub_error *err)
{
    lstub__demand demand;
    lstub__site site;
    int32_t status;
    LSTUB_INIT(*out);
    if ((status = lstub__demand_make(&demand, signal, criteria, err)) < 0
        || (status = lstub__site_make(&site, stackup, via, options, err)) < 0)
        return status;
    if (side != LSTUB_SIDE_TOP && side != LSTUB_SIDE_BOTTOM)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "side", -1, "side = %ld: must be LSTUB_SIDE_TOP or LSTUB_SIDE_BOTTOM", (long)side);
    int arm = lstub__arm_of(side);
    if (site.arm[arm].count == 0)
        return lstub__fail(err, LSTUB_E_NONE, "side", -1, "side = %ld: the via has no stub there", (long)side);
    lstub__branch other;
    int beside = site.arm[1 - arm].length > 0.0;
    if (beside && (status = lstub__branch_make(&other, &site, 1 - arm, site.arm[1 - arm].length, err)) < 0)
        return status;
    status = lstub__longest(&site, arm, beside ? &other : NULL, &demand, &out->length, &out->limited_by, err);
    if (beside)
        lstub__branch_done(&other);
    if (status < 0)
        return status;
    out->stub_length = site.arm[arm].length;
    out->margin = out->limited_by == LSTUB_LIMIT_NONE ? 0.0 : out->length - out->stub_length;
    double top = lstub__branch_range(&site, arm);
    if (fmax(demand.nyquist, demand.least_f1) > top)
        return lstub__fail(err, LSTUB_W_RANGE, "signal", -1, "limit found beyond the stated range of this model, which ends at %.6g Hz", top);
    return LSTUB_OK;
}

int32_t lstub_longest_stub(const lstub_stackup *stackup, const lstub_via *via, int32_t side, const lstub_model_options *options,
                           const lstub_signal *signal, const lstub_criteria *criteria, lstub_stub_limit *out, lstub_error *err)
{
    lstub_stub_limit ours;
    int32_t given, status = longest(stackup, via, side, options, signal, criteria, &ours, err);
    if (status < 0)
        return status;
    given = lstub__give(&ours, sizeof ours, out, sizeof ours, "out", err);
    return given < 0 ? given : status;
}

int32_t lstub_longest_stub_batch(const lstub_stackup *stackup, const lstub_via *vias, size_t via_stride, const int32_t *sides,
                                 size_t side_stride, const lstub_signal *signals, size_t signal_stride, const lstub_criteria *criteria,
                                 size_t criteria_stride, size_t count, const lstub_model_options *options, lstub_stub_limit *out,
                                 size_t out_stride, int32_t *status, lstub_error *err)
{
    lstub__batch batch = {0, 0};
    int32_t result;
    if (count > 0 && (lstub__need(vias, "vias", err) < 0 || lstub__need(sides, "sides", err) < 0
                      || lstub__need(signals, "signals", err) < 0 || lstub__need(criteria, "criteria", err) < 0
                      || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    if (side_stride % sizeof(int32_t) != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "sides", -1, "sides: stride = %lu bytes: must be 0 or a multiple of %lu",
                           (unsigned long)side_stride, (unsigned long)sizeof(int32_t));
    if (count > 0 && ((result = lstub__stride(out_stride, sizeof *out, "out", err)) < 0
                      || (result = lstub__stride_or_one(via_stride, sizeof *vias, "vias", err)) < 0
                      || (result = lstub__stride_or_one(signal_stride, sizeof *signals, "signals", err)) < 0
                      || (result = lstub__stride_or_one(criteria_stride, sizeof *criteria, "criteria", err)) < 0))
        return result;
    for (size_t i = 0; i < count; i++) {
        lstub_stub_limit *put = (lstub_stub_limit *)(void *)((char *)out + i * out_stride), ours;
        lstub_error item;
        LSTUB_INIT(item);
        int32_t one = longest(stackup, (const lstub_via *)(const void *)((const char *)vias + i * via_stride),
                              *(const int32_t *)(const void *)((const char *)sides + i * side_stride), options,
                              (const lstub_signal *)(const void *)((const char *)signals + i * signal_stride),
                              (const lstub_criteria *)(const void *)((const char *)criteria + i * criteria_stride), &ours, &item);
        if (one < 0)
            ours.length = ours.stub_length = ours.margin = NAN;
        result = lstub__give(&ours, sizeof ours, put, sizeof ours, "out", &item);
        if (result < 0)
            one = result;
        if (status != NULL)
            status[i] = one;
        lstub__batch_add(&batch, one, (int64_t)i, &item, err);
    }
    return batch.result;
}

typedef struct loss_limit {
    const lstub_model *model;
    double db;
} loss_limit;

static double over_loss(double f, const void *context)
{
    const loss_limit *limit = context;
    return lstub__branches_loss_db(limit->model->branch, limit->model->count, limit->model->z_ref, f) - limit->db;
}

int32_t lstub_highest_symbol_rate(const lstub_model *model, const lstub_criteria *criteria, double *symbol_rate,
                                  int32_t *limited_by, lstub_error *err)
{
    lstub_criteria c;
    int32_t which, status, limit = LSTUB_LIMIT_NONE;
    if (lstub__need(model, "model", err) < 0 || lstub__need(symbol_rate, "symbol_rate", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__criteria_take(&c, criteria, err)) < 0)
        return status;
    double rate = HUGE_VAL, f1 = lstub__branches_first_notch(model->branch, model->count, model->z_ref, &which);
    if (c.notch_over_nyquist > 0.0 && f1 < HUGE_VAL) {
        rate = 2.0 * f1 / c.notch_over_nyquist;
        limit = LSTUB_LIMIT_NOTCH;
    }
    if (c.added_loss_db > 0.0 && model->count > 0) {
        loss_limit context = {model, c.added_loss_db};
        double high = fmin(f1, LSTUB__F_MAX), f = high;
        if (over_loss(high, &context) > 0.0)    /* the loss rises up to the first notch */
            f = lstub__root(over_loss, &context, LSTUB__F_MIN, high, 1e-9 * high);
        if (isnan(f))
            return lstub__fail(err, LSTUB_E_NONE, "criteria", -1, "added_loss_db = %.6g dB: exceeded at the lowest frequency already",
                               c.added_loss_db);
        if (2.0 * f < rate && (f1 < HUGE_VAL || f < high)) {
            rate = 2.0 * f;
            limit = LSTUB_LIMIT_LOSS;
        }
    }
    if (rate > 1e12) {
        rate = HUGE_VAL;
        limit = LSTUB_LIMIT_NONE;
    }
    *symbol_rate = rate;
    if (limited_by != NULL)
        *limited_by = limit;
    for (int32_t i = 0; i < model->count; i++)
        if (rate < HUGE_VAL && 0.5 * rate > model->branch[i].f_range)
            return lstub__fail(err, LSTUB_W_RANGE, "criteria", -1, "found beyond the stated range of this model, which ends at %.6g Hz",
                               model->branch[i].f_range);
    return LSTUB_OK;
}
