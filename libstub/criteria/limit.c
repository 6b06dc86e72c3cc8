/* The inverse questions: how long a stub, how fast a signal. */
#include "criteria/criteria.h"
#include "num/root.h"

#include <math.h>

#define LENGTH_STEP 1e-9    /* m, to which a limit is found: far below any drill */

int32_t lstub__cut_lines(const lstub__site *site, double top, double bottom, lstub__line *lines)
{
    int32_t count = 0;
    if (top > 0.0)
        lstub__site_line(site, 0, top, &lines[count++]);
    if (bottom > 0.0)
        lstub__site_line(site, 1, bottom, &lines[count++]);
    return count;
}

typedef struct cutting {
    const lstub__site *site;
    const lstub__demand *demand;
    int    arm;
    double other;
} cutting;

static int32_t lines_at(const cutting *c, double length, lstub__line *lines)
{
    return lstub__cut_lines(c->site, c->arm == 0 ? length : c->other, c->arm == 0 ? c->other : length, lines);
}

/* What is left of the tightest criterion, as a part of its limit: >= 0 passes. */
static double left_over(double length, const void *context)
{
    const cutting *c = context;
    lstub__line lines[2];
    return lstub__left_over(lines, lines_at(c, length, lines), c->site->z_ref, c->demand);
}

/* The answer passes, and a length LENGTH_STEP above it fails; pads make small jumps in the curve. */
double lstub__longest(const lstub__site *site, int arm, double other, const lstub__demand *demand, int32_t *limited_by)
{
    cutting c = {site, demand, arm, other};
    double good = LENGTH_STEP, bad = site->arm[arm].full;
    lstub_margin margin;
    lstub__line lines[2];
    *limited_by = LSTUB_LIMIT_NONE;
    if (left_over(bad, &c) >= 0.0)
        return bad;
    if (!lstub__bracket(left_over, &c, &good, &bad, LENGTH_STEP))
        good = 0.0;
    lstub__judge(lines, lines_at(&c, bad, lines), site->z_ref, demand, &margin);
    *limited_by = margin.limited_by;
    return good;
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
    out->length = lstub__longest(&site, arm, site.arm[1 - arm].length, &demand, &out->limited_by);
    out->stub_length = site.arm[arm].length;
    out->margin = out->limited_by == LSTUB_LIMIT_NONE ? 0.0 : out->length - out->stub_length;
    lstub__line line;
    lstub__site_line(&site, arm, out->length > 0.0 ? out->length : site.arm[arm].full, &line);
    if (fmax(demand.nyquist, demand.least_f1) > line.f_range)
        return lstub__fail(err, LSTUB_W_RANGE, "signal", -1, "limit found beyond the stated range of this model, which ends at %.6g Hz",
                           line.f_range);
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
    if (count > 0 && (result = lstub__stride(out_stride, sizeof *out, "out", err)) < 0)
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
    return lstub__lines_loss_db(limit->model->line, limit->model->count, limit->model->z_ref, f) - limit->db;
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
    double rate = HUGE_VAL, f1 = lstub__lines_first_notch(model->line, model->count, model->z_ref, &which);
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
        if (rate < HUGE_VAL && 0.5 * rate > model->line[i].f_range)
            return lstub__fail(err, LSTUB_W_RANGE, "criteria", -1, "found beyond the stated range of this model, which ends at %.6g Hz",
                               model->line[i].f_range);
    return LSTUB_OK;
}
