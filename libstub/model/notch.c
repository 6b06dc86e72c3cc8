/* All notches of a model in a band, and the first notch of many vias. */
#include "model/model.h"
#include "num/root.h"

#include <math.h>

#define DEPTH_FLOOR (-300.0)   /* dB, of a lossless notch: a zero, whatever rounding leaves of it */

typedef struct seeing {
    const lstub__line *line;
    double z_ref, level;
} seeing;

static double im_zin(double f, const void *context)
{
    cplx y = lstub__line_admittance(((const seeing *)context)->line, f);
    return -y.im / cplx_norm(y);
}

static double over_level(double f, const void *context)
{
    const seeing *s = context;
    return lstub__lines_power(s->line, 1, s->z_ref, f) - s->level;
}

/* Where the notch is 3 dB above its floor on one side (sign), within half the way to its neighbour. */
static double half_width(const seeing *s, double f, double sign, double reach)
{
    for (double width = 1e-9 * f; width < reach; width *= 2.0)
        if (over_level(f + sign * width, s) > 0.0)
            return fabs(lstub__root(over_level, s, fmin(f, f + sign * width), fmax(f, f + sign * width), 1e-9 * width) - f);
    return NAN;
}

static void describe(const lstub__line *line, double z_ref, int n, double f, lstub_notch *out)
{
    seeing s = {line, z_ref, 2.0 * lstub__lines_power(line, 1, z_ref, f)};
    LSTUB_INIT(*out);
    out->f = f;
    out->depth_db = fmax(10.0 * log10(0.5 * s.level), DEPTH_FLOOR);
    if (line->lossless) {
        out->depth_db = DEPTH_FLOOR;
        out->f_series = f;
        out->q = HUGE_VAL;
        return;
    }
    double spread = line->radial_dk > 0.0 ? 0.6 : 0.05;
    out->f_series = lstub__root(im_zin, &s, f * (1.0 - 0.5 * spread / n), f * (1.0 + spread / n), 1e-12 * f);
    out->q = f / (half_width(&s, f, -1.0, 0.5 * f / n) + half_width(&s, f, 1.0, 0.5 * f / n));
}

typedef struct search {        /* the two stubs' notches, merged in rising order */
    const lstub__line *line[2];
    int32_t number[2];         /* the stub's */
    int     n[2];
    double  next[2];
    int32_t count;
} search;

static void step(search *s, double z_ref, double f_max, int i)
{
    do {
        s->n[i]++;
        double seed = lstub__line_seed(s->line[i], s->n[i]);
        s->next[i] = isnan(seed) || seed > 2.0 * f_max ? HUGE_VAL : lstub__line_notch(s->line[i], z_ref, s->n[i]);
    } while (isnan(s->next[i]));
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
    search s = {{NULL, NULL}, {0, 0}, {0, 0}, {0.0, 0.0}, 0};
    for (int32_t i = 0; i < model->count; i++)
        if (stub == LSTUB_ALL_STUBS || stub == i) {
            s.line[s.count] = &model->line[i];
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
            describe(s.line[i], model->z_ref, s.n[i], s.next[i], &one);
            one.stub = s.number[i];
            lstub__give(&one, sizeof one, (char *)notches + found * stride, sizeof one, "notches", NULL);
        }
        found++;
        last = s.next[i];
        top = fmin(top, s.line[i]->f_range);
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
    lstub__line lines[2];
    int32_t which, status = lstub__site_make(&site, stackup, via, options, err);
    if (status < 0)
        return status;
    double f = lstub__lines_first_notch(lines, lstub__site_lines(&site, lines), site.z_ref, &which);
    if (which < 0)
        return LSTUB_OK;
    double root = LSTUB_C0 / (4.0 * lines[which].length * f);
    *f1 = f;
    *dk = root * root;
    *length = lines[which].length;
    if (f <= lines[which].f_range)
        return LSTUB_OK;
    return lstub__fail(err, LSTUB_W_RANGE, "f1", -1, "first notch at %.6g Hz: the stated range of this model ends at %.6g Hz", f,
                       lines[which].f_range);
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
