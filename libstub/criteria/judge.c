#include "criteria/criteria.h"

#include <math.h>

int32_t lstub__signal_take(lstub_signal *ours, const lstub_signal *theirs, lstub_error *err)
{
    static const lstub__range RATE = {1e6, 1e12, 0, "Bd"};
    int32_t status = lstub__take(ours, sizeof *ours, theirs, sizeof *ours, "signal", err);
    if (status < 0)
        return status;
    if (ours->levels == 0)
        ours->levels = 2;
    if (ours->levels < 2 || ours->levels > 64)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "levels", -1, "levels = %ld: must be >= 2 and <= 64", (long)ours->levels);
    if (ours->reserved != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld: must be 0", (long)ours->reserved);
    return lstub__check(ours->symbol_rate, &RATE, "symbol_rate", err);
}

int32_t lstub__criteria_take(lstub_criteria *ours, const lstub_criteria *theirs, lstub_error *err)
{
    static const lstub__range RATIO = {0.0, 1000.0, 0, ""}, LOSS = {0.0, 100.0, 0, "dB"};
    int32_t status = lstub__take(ours, sizeof *ours, theirs, sizeof *ours, "criteria", err);
    if (status < 0)
        return status;
    if ((status = lstub__check(ours->notch_over_nyquist, &RATIO, "notch_over_nyquist", err)) < 0
        || (status = lstub__check(ours->added_loss_db, &LOSS, "added_loss_db", err)) < 0)
        return status;
    if (ours->notch_over_nyquist == 0.0 && ours->added_loss_db == 0.0)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "criteria", -1,
                           "criteria: notch_over_nyquist and added_loss_db are both 0: at least one must be > 0");
    return LSTUB_OK;
}

static double bits_per_second(const lstub_signal *signal) { return signal->symbol_rate * log((double)signal->levels) / log(2.0); }

int32_t lstub__demand_make(lstub__demand *demand, const lstub_signal *signal, const lstub_criteria *criteria, lstub_error *err)
{
    lstub_signal s;
    lstub_criteria c;
    int32_t status;
    if ((status = lstub__signal_take(&s, signal, err)) < 0 || (status = lstub__criteria_take(&c, criteria, err)) < 0)
        return status;
    demand->nyquist = 0.5 * s.symbol_rate;
    demand->bit_rate = bits_per_second(&s);
    demand->notch_ratio = c.notch_over_nyquist;
    demand->loss_db = c.added_loss_db;
    demand->least_f1 = demand->nyquist * fmax(c.notch_over_nyquist, c.added_loss_db > 0.0 ? 1.0 : 0.0);
    return LSTUB_OK;
}

double lstub__left_over(const lstub__branch *branches, int32_t count, double z_ref, const lstub__demand *demand)
{
    int32_t which;
    double f1 = lstub__branches_first_notch(branches, count, z_ref, &which), left = fmin(f1 / demand->least_f1 - 1.0, 4.0);
    if (demand->loss_db > 0.0 && f1 > demand->nyquist)
        left = fmin(left, 1.0 - lstub__branches_loss_db(branches, count, z_ref, demand->nyquist) / demand->loss_db);
    return left;
}

/* The criterion that fails by most, or passes with least, each counted as a part of its limit. */
static int32_t limited_by(const lstub_margin *m, const lstub__demand *d)
{
    double notch = d->notch_ratio > 0.0 ? m->f1 / (d->notch_ratio * d->nyquist) : HUGE_VAL;
    double loss = d->loss_db > 0.0 ? (m->added_loss_db > 0.0 ? d->loss_db / m->added_loss_db : HUGE_VAL) : HUGE_VAL;
    if (d->loss_db > 0.0 && m->f1 < d->nyquist)
        loss = fmin(loss, m->f1 / d->nyquist);
    if (notch == HUGE_VAL && loss == HUGE_VAL)
        return LSTUB_LIMIT_NONE;
    return notch <= loss ? LSTUB_LIMIT_NOTCH : LSTUB_LIMIT_LOSS;
}

int32_t lstub__judge(const lstub__branch *branches, int32_t count, double z_ref, const lstub__demand *demand, lstub_margin *margin)
{
    int32_t which, status = LSTUB_OK;
    LSTUB_INIT(*margin);
    margin->nyquist = demand->nyquist;
    margin->f1 = lstub__branches_first_notch(branches, count, z_ref, &which);
    margin->notch_over_nyquist = margin->f1 / demand->nyquist;
    margin->notch_margin = demand->notch_ratio > 0.0 ? margin->f1 - demand->notch_ratio * demand->nyquist : NAN;
    margin->added_loss_db = count > 0 ? lstub__branches_loss_db(branches, count, z_ref, demand->nyquist) : 0.0;
    margin->loss_margin_db = demand->loss_db > 0.0 ? demand->loss_db - margin->added_loss_db : NAN;
    margin->pass = margin->f1 >= demand->least_f1 && (demand->loss_db == 0.0 || margin->loss_margin_db >= 0.0);
    margin->limited_by = limited_by(margin, demand);
    lstub_rule_of_thumb_length(demand->bit_rate, &margin->rule_length, NULL);
    for (int32_t i = 0; i < count; i++) {
        margin->stub_length = fmax(margin->stub_length, branches[i].length);
        if (fmax(demand->nyquist, fmin(margin->f1, demand->least_f1)) > branches[i].f_range)
            status = LSTUB_W_RANGE;
    }
    margin->rule_margin = margin->rule_length - margin->stub_length;
    return status;
}

/* ---- public ------------------------------------------------------------------------------------ */

int32_t lstub_signal_nyquist(const lstub_signal *signal, double *nyquist, lstub_error *err)
{
    lstub_signal s;
    int32_t status = lstub__signal_take(&s, signal, err);
    if (status < 0)
        return status;
    if (lstub__need(nyquist, "nyquist", err) < 0)
        return LSTUB_E_NULL;
    *nyquist = 0.5 * s.symbol_rate;
    return LSTUB_OK;
}

int32_t lstub_signal_bit_rate(const lstub_signal *signal, double *bit_rate, lstub_error *err)
{
    lstub_signal s;
    int32_t status = lstub__signal_take(&s, signal, err);
    if (status < 0)
        return status;
    if (lstub__need(bit_rate, "bit_rate", err) < 0)
        return LSTUB_E_NULL;
    *bit_rate = bits_per_second(&s);
    return LSTUB_OK;
}

static int32_t range_warning(int32_t status, lstub_error *err)
{
    if (status == LSTUB_W_RANGE)
        lstub__fail(err, status, "signal", -1, "judged by the model beyond its stated range: see f_range of its line");
    return status;
}

int32_t lstub_model_margin(const lstub_model *model, const lstub_signal *signal, const lstub_criteria *criteria,
                           lstub_margin *out, lstub_error *err)
{
    lstub__demand demand;
    lstub_margin ours;
    int32_t status, given;
    if (lstub__need(model, "model", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__demand_make(&demand, signal, criteria, err)) < 0)
        return status;
    status = lstub__judge(model->branch, model->count, model->z_ref, &demand, &ours);
    given = lstub__give(&ours, sizeof ours, out, sizeof ours, "out", err);
    return given < 0 ? given : range_warning(status, err);
}

int32_t lstub_margin_batch(const lstub_stackup *stackup, const lstub_via *vias, size_t via_stride, const lstub_signal *signals,
                           size_t signal_stride, const lstub_criteria *criteria, size_t criteria_stride, size_t count,
                           const lstub_model_options *options, lstub_margin *out, size_t out_stride, int32_t *status, lstub_error *err)
{
    lstub__batch batch = {0, 0};
    int32_t result;
    if (count > 0 && (lstub__need(vias, "vias", err) < 0 || lstub__need(signals, "signals", err) < 0
                      || lstub__need(criteria, "criteria", err) < 0 || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    if (count > 0 && ((result = lstub__stride(out_stride, sizeof *out, "out", err)) < 0
                      || (result = lstub__stride_or_one(via_stride, sizeof *vias, "vias", err)) < 0
                      || (result = lstub__stride_or_one(signal_stride, sizeof *signals, "signals", err)) < 0
                      || (result = lstub__stride_or_one(criteria_stride, sizeof *criteria, "criteria", err)) < 0))
        return result;
    for (size_t i = 0; i < count; i++) {
        lstub_margin *put = (lstub_margin *)(void *)((char *)out + i * out_stride), ours;
        lstub_error item;
        lstub__demand demand;
        lstub__site site;
        lstub__branch branches[2];
        int32_t n = 0;
        LSTUB_INIT(item);
        int32_t one = lstub__demand_make(&demand, (const lstub_signal *)(const void *)((const char *)signals + i * signal_stride),
                                         (const lstub_criteria *)(const void *)((const char *)criteria + i * criteria_stride), &item);
        if (one == LSTUB_OK)
            one = lstub__site_make(&site, stackup, (const lstub_via *)(const void *)((const char *)vias + i * via_stride), options, &item);
        if (one == LSTUB_OK)
            one = lstub__branches_make(branches, &n, &site, site.arm[0].length, site.arm[1].length, &item);
        if (one == LSTUB_OK) {
            one = range_warning(lstub__judge(branches, n, site.z_ref, &demand, &ours), &item);
            lstub__branches_done(branches, n);
        } else {
            LSTUB_INIT(ours);
            ours.nyquist = ours.f1 = ours.notch_over_nyquist = ours.notch_margin = ours.added_loss_db = NAN;
            ours.loss_margin_db = ours.stub_length = ours.rule_length = ours.rule_margin = NAN;
        }
        result = lstub__give(&ours, sizeof ours, put, sizeof ours, "out", &item);
        if (result < 0)
            one = result;
        if (status != NULL)
            status[i] = one;
        lstub__batch_add(&batch, one, (int64_t)i, &item, err);
    }
    return batch.result;
}
