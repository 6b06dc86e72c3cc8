/* Notches of a transition: minima of |S| between two of its ports. */
#include "model/transition.h"
#include "num/root.h"

#include <math.h>

#define STEP     0.25e9     /* Hz, first sampling: notches with loss are wider                               */
#define LEAST_DB 1.0        /* a minimum that rises by less than this to either side is ripple               */

typedef struct seeing {
    const lstub_transition *t;
    int    mode, to, from;
    double level;
} seeing;

static double power(double f, const void *context)
{
    const seeing *c = context;
    const lstub_transition *t = c->t;
    int m = t->ways, at = c->to * (t->modes == 0 ? 2 * m : m) + c->from;
    cplx s[4 * LSTUB__WAYS * LSTUB__WAYS];
    if (c->mode == LSTUB_MODE_SINGLE) {
        double all[LSTUB__TABLE_SIZE];
        const double *one = &all[2 * (c->to * t->size + c->from)];
        lstub__transition_whole(t, f, all);
        return one[0] * one[0] + one[1] * one[1];
    }
    if (t->modes == 2) {
        lstub__transition_mode(t, c->mode == LSTUB_MODE_EVEN, f, s);
        return cplx_norm(s[at]);
    }
    lstub__transition_mode(t, 0, f, s);             /* both barrels in one model: the mean of what each does in that mode */
    const cplx *first = &s[at], *second = &s[at + m * (2 * m + 1)];
    cplx own = cplx_add(first[0], second[0]), across = cplx_add(first[m], second[-m]);
    return 0.25 * cplx_norm(c->mode == LSTUB_MODE_ODD ? cplx_sub(own, across) : cplx_add(own, across));
}

static double over_level(double f, const void *context) { return power(f, context) - ((const seeing *)context)->level; }

/* Width from the minimum to 3 dB above its floor on one side; NaN where it does not rise that far. */
static double half_width(const seeing *c, double f, double sign, double reach)
{
    for (double w = 1e-6 * f; w < reach; w *= 2.0)
        if (over_level(f + sign * w, c) > 0.0)
            return fabs(lstub__root(over_level, c, fmin(f, f + sign * w), fmax(f, f + sign * w), 1e-7 * f) - f);
    return NAN;
}

static void describe(seeing *c, double f, lstub_notch *out)
{
    double p = power(f, c);
    LSTUB_INIT(*out);
    out->stub = -1;
    out->f = f;
    out->f_series = NAN;
    out->error = NAN;
    out->depth_db = p > 1e-30 ? 10.0 * log10(p) : -300.0;
    c->level = 2.0 * p;
    out->q = f / (half_width(c, f, -1.0, 0.5 * f) + half_width(c, f, 1.0, fmin(0.5 * f, c->t->f_top - f)));
}

typedef struct found {
    lstub_notch *notches;
    size_t capacity, stride, count;
} found;

static void keep(seeing *c, double f, found *list)
{
    if (list->count < list->capacity) {
        lstub_notch one;
        describe(c, f, &one);
        lstub__give(&one, sizeof one, (char *)list->notches + list->count * list->stride, sizeof one, "notches", NULL);
    }
    list->count++;
}

/* A minimum counts once the curve has risen enough on both sides of it. */
static void search(seeing *c, double f_max, found *list)
{
    const double rise = pow(10.0, 0.1 * LEAST_DB), step = fmin(STEP, f_max / 64.0);
    int first = (int)ceil(1e6 / step);
    double at = first * step, least = power(at, c), highest = least;
    for (int i = first + 1; i * step <= f_max; i++) {
        double f = i * step, p = power(f, c);
        if (highest >= least * rise && p >= least * rise) {
            keep(c, lstub__dip(power, c, at - 0.99 * step, at + step), list);
            highest = least = p;
            at = f;
        } else if (p > highest) {
            highest = least = p;
            at = f;
        } else if (p < least) {
            least = p;
            at = f;
        }
    }
}

int32_t lstub_transition_notches(const lstub_transition *t, int32_t mode, int32_t to, int32_t from, double f_max,
                                 lstub_notch *notches, size_t capacity, size_t stride, size_t *count, lstub_error *err)
{
    if (lstub__need(t, "transition", err) < 0 || lstub__need(count, "count", err) < 0 || (capacity > 0 && lstub__need(notches, "notches", err) < 0))
        return LSTUB_E_NULL;
    lstub__range band = {1e6, t->f_top, 0, "Hz"};
    int32_t status, ports = mode == LSTUB_MODE_SINGLE ? lstub_transition_ports(t) : t->ways;
    if (mode < LSTUB_MODE_SINGLE || mode > LSTUB_MODE_EVEN)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "mode", -1, "mode = %ld: must be one of LSTUB_MODE_...", (long)mode);
    if (mode != LSTUB_MODE_SINGLE && t->modes == 1)
        return lstub__fail(err, LSTUB_E_NONE, "mode", -1, "mode = %ld: a single barrel has no modes", (long)mode);
    if (to < 0 || to >= ports)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "to", -1, "to = %ld: must be >= 0 and < %ld", (long)to, (long)ports);
    if (from < 0 || from >= ports)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "from", -1, "from = %ld: must be >= 0 and < %ld", (long)from, (long)ports);
    if ((status = lstub__check(f_max, &band, "f_max", err)) < 0 || (capacity > 0 && (status = lstub__stride(stride, sizeof *notches, "notches", err)) < 0))
        return status;
    for (size_t i = 0; i < capacity; i++)
        if ((status = lstub__fits((char *)notches + i * stride, sizeof *notches, "notches", err)) < 0)
            return status;
    seeing c = {t, mode, to, from, 0.0};
    found list = {notches, capacity, stride, 0};
    search(&c, f_max, &list);
    *count = list.count;
    if (list.count > capacity)
        return lstub__fail(err, LSTUB_W_CAPACITY, "capacity", -1, "capacity = %lu: %lu notches found", (unsigned long)capacity, (unsigned long)list.count);
    return LSTUB_OK;
}
