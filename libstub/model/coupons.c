/* The in-plane Dk of a laminate from coupons, with the model for what it predicts, and back into a stackup. */
#include "model/model.h"

#include <math.h>
#include <string.h>

/* ---- a stackup with another ratio --------------------------------------------------------------- */

int32_t lstub_stackup_with_in_plane_ratio(const lstub_stackup *stackup, double ratio, const lstub_allocator *allocator,
                                          lstub_stackup **out, lstub_error *err)
{
    static const lstub__range RATIO = {0.5, 2.0, 0, ""};
    lstub_layer layers[LSTUB_LAYERS_MAX];
    lstub_dielectric dielectrics[LSTUB_LAYERS_MAX];
    int32_t status;
    if (lstub__need(stackup, "stackup", err) < 0 || lstub__need(out, "out", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__check(ratio, &RATIO, "ratio", err)) < 0)
        return status;
    for (int32_t i = 0; i < stackup->count; i++) {
        LSTUB_INIT(layers[i]);
        if ((status = lstub_stackup_layer(stackup, i, &layers[i], err)) < 0)
            return status;
        dielectrics[i] = *layers[i].dielectric;
        dielectrics[i].in_plane_ratio = ratio;
        layers[i].dielectric = &dielectrics[i];
    }
    return lstub_stackup_create(layers, (size_t)stackup->count, sizeof layers[0], allocator, out, err);
}

/* ---- coupons ------------------------------------------------------------------------------------ */

/* A fit looks at three ratios at a time, for its differences: the stackups of these are kept, and what each coupon says. */
#define KEPT 3

typedef struct answer {
    double ratio, f, length;     /* ratio 0: none yet */
    int32_t status;
} answer;

typedef struct coupons {
    const lstub_stackup *stackup;
    const char *vias;
    size_t count, stride;
    const lstub_model_options *options;
    const lstub_allocator *allocator;
    double ratio[KEPT];
    lstub_stackup *changed[KEPT];
    int oldest;
    answer *answers;             /* KEPT a coupon, latest first */
    int32_t failed;              /* of the first failure, whose message is in fault */
    lstub_error fault;
} coupons;

static int32_t stackup_at(coupons *c, double ratio, const lstub_stackup **out)
{
    lstub_stackup *made = NULL;
    for (int k = 0; k < KEPT; k++)
        if (c->changed[k] != NULL && c->ratio[k] == ratio) {
            *out = c->changed[k];
            return LSTUB_OK;
        }
    int32_t status = lstub_stackup_with_in_plane_ratio(c->stackup, ratio, c->allocator, &made, &c->fault);
    if (status < 0)
        return status;
    lstub_stackup_destroy(c->changed[c->oldest]);
    c->changed[c->oldest] = made;
    c->ratio[c->oldest] = ratio;
    c->oldest = (c->oldest + 1) % KEPT;
    *out = made;
    return LSTUB_OK;
}

static int32_t ask_model(coupons *c, double ratio, size_t i, const answer **out)
{
    answer *kept = c->answers + KEPT * i, now = {ratio, NAN, NAN, LSTUB_OK};
    const lstub_stackup *changed = NULL;
    for (int k = 0; k < KEPT; k++)
        if (kept[k].ratio == ratio) {
            *out = &kept[k];
            return LSTUB_OK;
        }
    int32_t status = stackup_at(c, ratio, &changed);
    if (status < 0)
        return status;
    status = lstub_first_notch_batch(changed, (const lstub_via *)(const void *)(c->vias + i * c->stride), 1, c->stride, c->options, &now.f,
                                     NULL, &now.length, &now.status, &c->fault);
    if (status < 0)
        return status;
    memmove(kept + 1, kept, (KEPT - 1) * sizeof *kept);
    kept[0] = now;
    *out = kept;
    return LSTUB_OK;
}

static int32_t predict(void *user, double ratio, double offset, size_t i, double *f)
{
    coupons *c = user;
    const answer *a = NULL;
    int32_t status = ask_model(c, ratio, i, &a);
    if (status < 0) {
        lstub__fail_where(&c->fault, (int64_t)i, "coupon %lu", (unsigned long)i);
        return c->failed = status;
    }
    /* A stub that the offset has used up has no notch. */
    *f = a->length + offset > 0.0 ? a->f * a->length / (a->length + offset) : NAN;
    return a->status;
}

static int32_t fit(coupons *c, const double *f, const double *f_sigma, int32_t with_offset, lstub_stackup **fitted, lstub_fit *out,
                   double *residuals, lstub_error *err)
{
    lstub_fit ours;
    lstub_stackup *made = NULL;
    LSTUB_INIT(ours);
    int32_t status = lstub_fit_in_plane_dk(predict, c, f, f_sigma, c->count, with_offset, &ours, NULL, err);
    if (c->failed < 0)                                 /* the model's own message says more */
        return lstub__fail(err, c->failed, c->fault.field, c->fault.index, "%s", c->fault.message);
    if (status < 0)
        return status;
    if (fitted != NULL) {
        int32_t last = lstub_stackup_with_in_plane_ratio(c->stackup, ours.ratio, c->allocator, &made, err);
        if (last < 0)
            return last;
        *fitted = made;
    }
    for (size_t i = 0; residuals != NULL && i < c->count; i++) {
        double there = NAN;
        predict(c, ours.ratio, ours.offset, i, &there);
        residuals[i] = f[i] - there;
    }
    lstub__give(&ours, sizeof ours, out, sizeof ours, "out", NULL);
    return status;
}

int32_t lstub_fit_coupons(const lstub_stackup *stackup, const lstub_via *vias, size_t count, size_t stride, const double *f,
                          const double *f_sigma, int32_t with_offset, const lstub_model_options *options, const lstub_allocator *allocator,
                          lstub_stackup **fitted, lstub_fit *out, double *residuals, lstub_error *err)
{
    lstub_allocator alloc;
    int32_t status;
    if (lstub__need(stackup, "stackup", err) < 0 || lstub__need(vias, "vias", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__fits(out, sizeof *out, "out", err)) < 0 || (status = lstub__stride(stride, sizeof *vias, "vias", err)) < 0
        || (status = lstub__allocator(allocator, &alloc, err)) < 0)
        return status;
    coupons c = {stackup, (const char *)vias, count, stride, options, &alloc, {0.0}, {NULL}, 0, NULL, LSTUB_OK, {0}};
    LSTUB_INIT(c.fault);
    c.answers = lstub__new(&alloc, count, KEPT * sizeof *c.answers, err);
    status = c.answers == NULL ? LSTUB_E_MEMORY : fit(&c, f, f_sigma, with_offset, fitted, out, residuals, err);
    for (int k = 0; k < KEPT; k++)
        lstub_stackup_destroy(c.changed[k]);
    lstub__free(&alloc, c.answers);
    return status;
}
