/* All notches of a model in a band, and the first notch of many vias. */
#include "model/model.h"
#include "num/root.h"

#include <math.h>

typedef struct seeing {
    const lstub__branch *branch;
    double z_ref, level;
} seeing;

static double im_zin(double f, const void *context)
{
    cplx y = lstub__branch_admittance(((const seeing *)context)->branch, f);
    return -y.im / cplx_norm(y);
}

static double over_level(double f, const void *context)
{
    const seeing *s = context;
    return lstub__branches_power(s->branch, 1, s->z_ref, f) - s->level;
}

/* How far a notch's own ground reaches: half the way to the one before. */
#define NEAREST 1e-9

/* Where the notch is 3 dB above its floor on one side (sign). */
static double half_width(const seeing *s, double f, double sign, double reach)
{
    for (double width = NEAREST * f; width < reach; width *= 2.0)
        if (over_level(f + sign * width, s) > 0.0)
            return fabs(lstub__root(over_level, s, fmin(f, f + sign * width), fmax(f, f + sign * width), 1e-9 * width) - f);
    return NAN;
}

/* Where the reactance rises through zero next to the notch. */
static double series_resonance(const seeing *s, double f, double reach)
{
    for (double width = NEAREST * f; width < reach; width *= 2.0)
        if (im_zin(f - width, s) < 0.0 && im_zin(f + width, s) > 0.0)
            return lstub__root(im_zin, s, f - width, f + width, 1e-12 * f);
    return NAN;
}

static void describe(const lstub__branch *branch, double z_ref, double before, double f, lstub_notch *out)
{
    seeing s = {branch, z_ref, 2.0 * lstub__branches_power(branch, 1, z_ref, f)};
    double reach = 0.5 * (f - before);
    LSTUB_INIT(*out);
    out->f = f;
    out->error = lstub__branch_notch_error(branch, z_ref, f);
    out->depth_db = fmax(10.0 * log10(0.5 * s.level), -LSTUB__LOSS_MOST);
    if (branch->lossless) {
        out->depth_db = -LSTUB__LOSS_MOST;
        out->f_series = f;
        out->q = HUGE_VAL;
        return;
    }
    out->f_series = series_resonance(&s, f, reach);
    out->q = f / (half_width(&s, f, -1.0, reach) + half_width(&s, f, 1.0, reach));
}

typedef struct search {        /* the two stubs' notches, merged in rising order */
    const lstub__branch *branch[2];
    int32_t number[2];         /* the stub's */
    double  before[2], next[2];
    int32_t count;
} search;

static void step(search *s, double z_ref, double f_max, int i)
{
    s->before[i] = s->next[i];
    s->next[i] = lstub__branch_notch(s->branch[i], z_ref, s->next[i], f_max);
}

int32_t lstub_model_notches(const lstub_model *model, int32_t stub, double f_max, lstub_notch *notches, size_t capacity,
                            size_t stride, size_t *count, lstub_error *err)
{
    static const lstub__range BAND = {LSTUB__F_MIN, LSTUB__F_MAX, 0, "Hz"};
    int32_t status;
    if (lstub__need(model, "model", err) < 0 || lstub__need(count, "count", err) < 0
        || (capacity > 0 && lstub__need(notches, "notches", err) < 0))
        return LSTUB_E_NULL;
    if (stub != LSTUB_ALL_STUBS && (stub < 0 || stub >= model->count))
        return lstub__fail(err, LSTUB_E_ARGUMENT, "stub", -1, "stub = %ld: must be >= 0 and < %ld, or LSTUB_ALL_STUBS", (long)stub,
                           (long)model->count);
    if ((status = lstub__check(f_max, &BAND, "f_max", err)) < 0
        || (capacity > 0 && (status = lstub__stride(stride, sizeof *notches, "notches", err)) < 0))
        return status;
    for (size_t i = 0; i < capacity; i++)
        if ((status = lstub__fits((char *)notches + i * stride, sizeof *notches, "notches", err)) < 0)
            return status;
    search s = {{NULL, NULL}, {0, 0}, {0.0, 0.0}, {0.0, 0.0}, 0};
    for (int32_t i = 0; i < model->count; i++)
        if (stub == LSTUB_ALL_STUBS || stub == i) {
            s.branch[s.count] = &model->branch[i];
            s.number[s.count] = i;
            step(&s, model->z_ref, f_max, s.count++);
        }
    size_t found = 0;
    double top = HUGE_VAL, last = 0.0;
    for (;;) {
        int i = s.count == 2 && s.next[1] < s.next[0];
        if (s.count == 0 || !(s.next[i] <= f_max))
            break;
        if (found < capacity) {
            lstub_notch one;
            describe(s.branch[i], model->z_ref, s.before[i], s.next[i], &one);
            one.stub = s.number[i];
            lstub__give(&one, sizeof one, (char *)notches + found * stride, sizeof one, "notches", NULL);
        }
        found++;
        last = s.next[i];
        top = fmin(top, s.branch[i]->f_range);
        step(&s, model->z_ref, f_max, i);
    }
    *count = found;
    if (found > capacity)
        return lstub__fail(err, LSTUB_W_CAPACITY, "capacity", -1, "capacity = %lu: %lu notches found", (unsigned long)capacity,
                           (unsigned long)found);
    if (last > top)
        return lstub__fail(err, LSTUB_W_RANGE, "f_max", -1, "notches beyond %.6g Hz are outside the stated range of this model", top);
    return LSTUB_OK;
}

static int32_t first_notch(const lstub_stackup *stackup, const lstub_via *via, const lstub_model_options *options, double *f1,
                           double *dk, double *length, lstub_error *err)
{
    lstub__site site;
    lstub__branch branches[2];
    int32_t n, which, status = lstub__site_make(&site, stackup, via, options, err);
    if (status < 0 || (status = lstub__branches_make(branches, &n, &site, site.arm[0].length, site.arm[1].length, err)) < 0)
        return status;
    double f = lstub__branches_first_notch(branches, n, site.z_ref, &which), top = HUGE_VAL;
    if (which >= 0) {
        double root = LSTUB_C0 / (4.0 * branches[which].length * f);
        *f1 = f;
        *dk = root * root;
        *length = branches[which].length;
        top = branches[which].f_range;
    }
    lstub__branches_done(branches, n);
    if (which < 0 || f <= top)
        return LSTUB_OK;
    return lstub__fail(err, LSTUB_W_RANGE, "f1", -1, "first notch at %.6g Hz: the stated range of this model ends at %.6g Hz", f, top);
}

int32_t lstub_first_notch_batch(const lstub_stackup *stackup, const lstub_via *vias, size_t count, size_t stride,
                                const lstub_model_options *options, double *f1, double *dk_effective, double *length,
                                int32_t *status, lstub_error *err)
{
    lstub__batch batch = {0, 0};
    int32_t result;
    if (lstub__need(stackup, "stackup", err) < 0 || (count > 0 && lstub__need(vias, "vias", err) < 0))
        return LSTUB_E_NULL;
    lstub_model_options checked;
    if ((result = lstub__options_take(&checked, options, err)) < 0 || (count > 0 && (result = lstub__stride(stride, sizeof *vias, "vias", err)) < 0))
        return result;
    for (size_t i = 0; i < count; i++) {
        double f = NAN, dk = NAN, len = NAN;
        lstub_error item;
        LSTUB_INIT(item);
        int32_t one = first_notch(stackup, (const lstub_via *)(const void *)((const char *)vias + i * stride), &checked, &f, &dk, &len, &item);
        if (f1 != NULL)
            f1[i] = f;
        if (dk_effective != NULL)
            dk_effective[i] = dk;
        if (length != NULL)
            length[i] = len;
        if (status != NULL)
            status[i] = one;
        lstub__batch_add(&batch, one, (int64_t)i, &item, err);
    }
    return batch.result;
}
