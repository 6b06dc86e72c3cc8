/* Stub notches in a measured |S21|: which dips are notches, and how sure that is. */
#include "measure/curve.h"

#include <math.h>
#include <string.h>

#define NOTCHES_MOST 64
#define PASSES       6
#define WINDOWS_MOST 8
#define SAMPLES_LEAST 16
#define SPREAD_LEAST   0.1       /* dB: nothing measured is better                                    */
#define SCORE_LEAST    4.0
#define SCORE_RIPPLE   8.0
#define SCORE_EARLY    1.0       /* of a notch that nothing explains yet                             */
#define SIGMA_MOST     0.25      /* of the width                                                      */
#define EARLY          0.4       /* of the least depth: enough to help the trend                      */
/* Of a ripple the fits take a part for trend and shape, so that less is left than there was. Chosen on drawn channels: of each 200
** notches at least 95 % lie within 2 sigma. */
#define TAKEN_UP       1.5
#define RECOVERS       1.0       /* dB                                                                */
/* Impedances of the barrel over that of the channel: barrels have 10 to 200 ohm. A ripple has the shape of far more, nothing in
** it being as broad as a quarter of a wave; the bend where a roll-off meets the noise that of far less. Near the edge of the
** band that its cavities pass a barrel has a shape of more, too, and so have its higher notches, but deeper than two
** reflections make a ripple: 6 dB would be |S11| = 0.58 of both. */
#define IMPEDANCE_USUAL 0.5
#define IMPEDANCE_LOW  0.02
#define IMPEDANCE_HIGH 4.0
#define IMPEDANCE_DEEP 20.0
#define DEEP           6.0       /* dB                                                                */

typedef struct found {
    lstub__dip   dip;
    lstub__shape shape;
    size_t from, to;             /* samples of its flanks at half its depth in dB                     */
    size_t lowest;               /* where the averaged curve itself is least between them             */
    double score;
} found;

typedef struct search {
    lstub__curve c;
    double depth_least;
    found  list[NOTCHES_MOST];
    size_t count;
    double *trend_before;        /* [n]                                                               */
} search;

/* ---- dips --------------------------------------------------------------------------------------- */

static double under(const lstub__curve *c, size_t i) { return c->db[i] - c->trend[i]; }

/* How far the detrended curve rises on one side of a sample before it falls below it; `enough` is enough to know. */
static double rise_of(const lstub__curve *c, size_t at, int up, double enough)
{
    double level = under(c, at), most = level;
    for (size_t i = at; (up ? i + 1 < c->n : i > 0) && most - level < enough;) {
        i = up ? i + 1 : i - 1;
        if (under(c, i) < level)
            break;
        most = fmax(most, under(c, i));
    }
    return most - level;
}

static void flanks_of(const lstub__curve *c, found *n)
{
    double limit = -0.5 * n->dip.depth;
    n->from = n->to = n->lowest = n->dip.at;
    while (n->from > 0 && under(c, n->from - 1) <= limit)
        n->from--;
    while (n->to + 1 < c->n && under(c, n->to + 1) <= limit)
        n->to++;
    for (size_t i = n->from; i <= n->to; i++)
        if (c->db[i] < c->db[n->lowest])
            n->lowest = i;
}

/*
** Whether the curve as measured, trend and all, rises again beyond its flanks: the bend where a roll-off meets the noise does
** not. By means over parts of the notch's width, for noise to matter little.
*/
static int recovers(const lstub__curve *c, const found *n)
{
    double width = c->f[n->to] - c->f[n->from], f = n->shape.f, last = c->f[c->n - 1];
    double from = fmin(f + 0.5 * width, last - 0.25 * width), to = fmin(f + width, last);
    return lstub__curve_mean(c, from, to) > lstub__curve_mean(c, f - 0.125 * width, fmin(f + 0.125 * width, last)) + RECOVERS;
}

/* What is left around a notch, dB rms: where the stub reflects, the channel's other reflections show most. */
static double left_near(const lstub__curve *c, double f)
{
    double sum = 0.0, over = 0.0;
    for (size_t i = 1; i < c->n; i++)
        if (fabs(c->f[i] - f) < 0.5 * f) {
            double r = under(c, i) - c->stubs[i], step = c->f[i] - c->f[i - 1];
            sum += r * r * step;
            over += step;
        }
    return sqrt(sum / over);
}

static double f_sigma_of(const search *s, const found *n)
{
    return hypot(n->shape.f_sigma, TAKEN_UP * n->shape.f_ripple * left_near(&s->c, n->shape.f));
}

/* A shape of a barrel's impedance is believed, where it stands out; narrower and wider ones have to be more than that. */
static int is_stub_like(const lstub__curve *c, const found *n, int final)
{
    double impedance = 0.5 * n->shape.zeta;
    if (impedance > IMPEDANCE_USUAL && impedance < IMPEDANCE_HIGH && n->score >= (final ? SCORE_RIPPLE : SCORE_EARLY))
        return 1;
    double high = n->dip.depth > DEEP && n->score >= SCORE_RIPPLE ? IMPEDANCE_DEEP : IMPEDANCE_HIGH;
    return impedance > IMPEDANCE_LOW && impedance < high && recovers(c, n);
}

static int is_certain(const search *s, const found *n)
{
    return n->score > SCORE_LEAST && f_sigma_of(s, n) < SIGMA_MOST * (s->c.f[n->to] - s->c.f[n->from]);
}

/* final: not one to help the trend only. */
static int is_notch(const search *s, found *n, int final)
{
    const lstub__curve *c = &s->c;
    double least = final ? s->depth_least : EARLY * s->depth_least;
    if (n->dip.depth < least || rise_of(c, n->dip.at, 0, least) < least || rise_of(c, n->dip.at, 1, least) < least)
        return 0;
    flanks_of(c, n);
    n->score = fmin(rise_of(c, n->dip.at, 0, HUGE_VAL), rise_of(c, n->dip.at, 1, HUGE_VAL)) / fmax(c->spread, SPREAD_LEAST);
    return lstub__shape_fit(c, &n->dip, &n->shape) && is_stub_like(c, n, final) && (!final || is_certain(s, n));
}

/* Of two dips in one notch the deeper one is it. */
static void keep(search *s, const found *n)
{
    while (s->count > 0 && s->list[s->count - 1].to >= n->dip.at && s->list[s->count - 1].dip.depth < n->dip.depth)
        s->count--;
    if (s->count > 0 && (s->list[s->count - 1].to >= n->dip.at || s->list[s->count - 1].dip.at >= n->from))
        return;
    if (s->count < NOTCHES_MOST)
        s->list[s->count++] = *n;
}

static void find(search *s, int final)
{
    const lstub__curve *c = &s->c;
    s->count = 0;
    for (size_t i = 1; i + 1 < c->n; i++) {
        if (!(under(c, i) < under(c, i - 1) && under(c, i) <= under(c, i + 1)))
            continue;
        found n;
        memset(&n, 0, sizeof n);
        n.dip.at = i;
        n.dip.depth = -under(c, i);
        if (is_notch(s, &n, final))
            keep(s, &n);
    }
}

static void explain(search *s)
{
    lstub__curve *c = &s->c;
    for (size_t i = 0; i < c->n; i++) {
        c->stubs[i] = 0.0;
        for (size_t k = 0; k < s->count; k++)
            c->stubs[i] += lstub__shape_db(&s->list[k].shape, c->f[i]);
    }
}

/* What helped the trend and is no notch is not explained any more: the others have to stand out from that, too. */
static void weed(search *s)
{
    size_t kept = 0;
    double before = s->c.spread;
    s->c.spread = lstub__curve_spread(&s->c);
    for (size_t k = 0; k < s->count; k++) {
        found *n = &s->list[k];
        n->score *= fmax(before, SPREAD_LEAST) / fmax(s->c.spread, SPREAD_LEAST);
        if (is_stub_like(&s->c, n, 1) && is_certain(s, n))
            s->list[kept++] = *n;
    }
    s->count = kept;
}

/* Trend and notches in turn, each from what the other leaves, as long as less and less is left. */
static void look(search *s)
{
    lstub__curve *c = &s->c;
    lstub__curve_average(c);
    memset(c->stubs, 0, c->n * sizeof *c->stubs);
    lstub__curve_trend(c, 1);
    for (int pass = 0; pass < PASSES; pass++) {
        double before = c->spread;
        memcpy(s->trend_before, c->trend, c->n * sizeof *c->trend);
        find(s, 0);
        if (s->count == 0)
            break;
        explain(s);
        lstub__curve_trend(c, 0);
        if (c->spread >= before) {
            memcpy(c->trend, s->trend_before, c->n * sizeof *c->trend);
            c->spread = before;
            break;
        }
    }
    find(s, 1);
    explain(s);
    weed(s);
}

/* A window that was not asked for is no wider than an eighth of the narrowest notch. */
static void look_finer(search *s)
{
    double least = lstub__curve_least_window(&s->c);
    s->c.window = lstub__curve_window(&s->c);
    for (int turn = 0; turn < WINDOWS_MOST; turn++) {
        double widest = HUGE_VAL;
        look(s);
        for (size_t k = 0; k < s->count; k++)
            widest = fmin(widest, 0.125 * (s->c.f[s->list[k].to] - s->c.f[s->list[k].from]));
        if (s->c.window <= fmax(widest, least))
            return;
        s->c.window = fmax(widest, least);
    }
}

/* ---- asked from outside ------------------------------------------------------------------------- */

static int32_t quality_of(const search *s, const found *n)
{
    const lstub__curve *c = &s->c;
    int32_t quality = LSTUB_QUALITY_GOOD;
    double width = c->f[n->to] - c->f[n->from];
    if (n->dip.depth < DEEP)
        quality |= LSTUB_QUALITY_SHALLOW;
    if (n->from == 0 || n->to + 1 == c->n)
        quality |= LSTUB_QUALITY_EDGE;
    if (n->score < SCORE_RIPPLE)
        quality |= LSTUB_QUALITY_RIPPLE;
    if (f_sigma_of(s, n) > 0.05 * n->shape.f || width > 0.6 * n->shape.f)
        quality |= LSTUB_QUALITY_WIDE;
    if (n->shape.floor < 2.0 * n->shape.floor_sigma)
        quality |= LSTUB_QUALITY_FLOOR;
    return quality;
}

static lstub_measured_notch describe(const search *s, const found *n)
{
    const lstub__curve *c = &s->c;
    lstub_measured_notch out;
    LSTUB_INIT(out);
    out.quality = quality_of(s, n);
    out.f = n->shape.f;
    out.f_sigma = f_sigma_of(s, n);
    out.depth_db = -n->dip.depth;
    out.level_db = c->db[n->lowest];
    out.f_minimum = c->f[n->lowest];
    out.width = c->f[n->to] - c->f[n->from];
    out.q = out.quality & LSTUB_QUALITY_FLOOR ? NAN : lstub__shape_q(&n->shape);
    out.impedance = 0.5 * n->shape.zeta;
    out.score = n->score;
    out.window = c->window;
    return out;
}

/* The samples from f_low to f_high: the first and how many. */
static int32_t take_band(const double *freq, size_t n, const lstub_search *options, size_t *first, size_t *count, lstub_error *err)
{
    static const lstub__range F = {0.0, 1e12, 0, "Hz"};
    for (size_t i = 0; i < n; i++) {
        int32_t status = lstub__check(freq[i], &F, "freq", err);
        if (status == LSTUB_OK && i > 0 && freq[i] <= freq[i - 1])
            status = lstub__fail(err, LSTUB_E_ARGUMENT, "freq", -1, "freq = %.9g Hz: must be > the one before, %.9g Hz", freq[i], freq[i - 1]);
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "item %lu", (unsigned long)i);
            return status;
        }
    }
    double high = options->f_high > 0.0 ? options->f_high : HUGE_VAL;
    *first = *count = 0;
    for (size_t i = 0; i < n; i++)
        if (freq[i] < options->f_low)
            *first = i + 1;
        else if (freq[i] <= high)
            (*count)++;
    if (*count < SAMPLES_LEAST)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "n", -1, "n = %lu frequencies, %lu within the band: must be >= %d there", (unsigned long)n,
                           (unsigned long)*count, SAMPLES_LEAST);
    return LSTUB_OK;
}

static int32_t take_options(lstub_search *ours, const lstub_search *theirs, lstub_error *err)
{
    static const lstub__range F = {0.0, 1e12, 0, "Hz"}, DEPTH = {1.0, 100.0, 0, "dB"};
    int32_t status = LSTUB_OK;
    LSTUB_INIT(*ours);
    if (theirs != NULL)
        status = lstub__take(ours, sizeof *ours, theirs, sizeof *ours, "search", err);
    if (status < 0)
        return status;
    if (ours->depth_least == 0.0)
        ours->depth_least = 3.0;
    if ((status = lstub__check(ours->window, &F, "window", err)) < 0 || (status = lstub__check(ours->f_low, &F, "f_low", err)) < 0
        || (status = lstub__check(ours->f_high, &F, "f_high", err)) < 0 || (status = lstub__check(ours->depth_least, &DEPTH, "depth_least", err)) < 0)
        return status;
    if (ours->f_high > 0.0 && ours->f_high <= ours->f_low)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "f_high", -1, "f_high = %.9g Hz: must be > f_low = %.9g Hz", ours->f_high, ours->f_low);
    return LSTUB_OK;
}

static int32_t take_power(lstub__curve *c, const char *s, size_t stride, size_t first, lstub_error *err)
{
    for (size_t i = 0; i < c->n; i++) {
        double z[2];
        memcpy(z, s + (first + i) * stride, sizeof z);
        c->power[i] = z[0] * z[0] + z[1] * z[1];
        if (!(c->power[i] <= 1e12))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "s", (int64_t)(first + i), "item %lu: s = %.6g, %.6g: |s| must be <= 1e6",
                               (unsigned long)(first + i), z[0], z[1]);
    }
    return LSTUB_OK;
}

static void give(const search *s, lstub_measured_notch *notches, size_t capacity, size_t stride, double *averaged_db, double *trend_db,
                 size_t n, size_t first)
{
    for (size_t k = 0; k < s->count && k < capacity; k++) {
        lstub_measured_notch one = describe(s, &s->list[k]);
        lstub__give(&one, sizeof one, (char *)notches + k * stride, sizeof one, "notches", NULL);
    }
    for (size_t i = 0; i < n; i++) {
        int in = i >= first && i - first < s->c.n;
        if (averaged_db != NULL)
            averaged_db[i] = in ? s->c.db[i - first] : NAN;
        if (trend_db != NULL)
            trend_db[i] = in ? s->c.trend[i - first] : NAN;
    }
}

int32_t lstub_find_notches(const double *freq, size_t n, const double *s, size_t s_stride, const lstub_search *options,
                           lstub_measured_notch *notches, size_t capacity, size_t stride, size_t *count, double *averaged_db,
                           double *trend_db, lstub_error *err)
{
    lstub_search ours;
    lstub_allocator alloc;
    size_t first, in;
    int32_t status;
    if (lstub__need(freq, "freq", err) < 0 || lstub__need(s, "s", err) < 0 || lstub__need(count, "count", err) < 0
        || (capacity > 0 && lstub__need(notches, "notches", err) < 0))
        return LSTUB_E_NULL;
    if (s_stride < 16 || s_stride % 8 != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "s_stride", -1, "s_stride = %lu bytes: must be >= 16 and a multiple of 8", (unsigned long)s_stride);
    if ((capacity > 0 && (status = lstub__stride(stride, sizeof *notches, "notches", err)) < 0)
        || (status = take_options(&ours, options, err)) < 0 || (status = lstub__allocator(ours.allocator, &alloc, err)) < 0
        || (status = take_band(freq, n, &ours, &first, &in, err)) < 0)
        return status;
    for (size_t i = 0; i < capacity; i++)
        if ((status = lstub__fits((char *)notches + i * stride, sizeof *notches, "notches", err)) < 0)
            return status;
    search *work = lstub__new(&alloc, 1, sizeof *work, err);
    double *room = work == NULL ? NULL : lstub__new(&alloc, in, 7 * sizeof *room, err);
    if (room == NULL) {
        lstub__free(&alloc, work);
        return LSTUB_E_MEMORY;
    }
    work->c = (lstub__curve){in, freq + first, room, room + in, room + 2 * in, room + 3 * in, room + 4 * in, room + 5 * in, ours.window, 0.0};
    work->trend_before = room + 6 * in;
    work->depth_least = ours.depth_least;
    if ((status = take_power(&work->c, (const char *)s, s_stride, first, err)) == LSTUB_OK) {
        if (ours.window > 0.0)
            look(work);
        else
            look_finer(work);
        give(work, notches, capacity, stride, averaged_db, trend_db, n, first);
        *count = work->count;
        if (work->count > capacity)
            status = lstub__fail(err, LSTUB_W_CAPACITY, "capacity", -1, "capacity = %lu: %lu notches found", (unsigned long)capacity,
                                 (unsigned long)work->count);
    }
    lstub__free(&alloc, room);
    lstub__free(&alloc, work);
    return status;
}
