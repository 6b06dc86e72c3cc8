#include "ipc2581/reader.h"

#include <math.h>
#include <string.h>

#define RETURNS_MAX 64
#define PAIR_REACH 2.5e-3      /* m: barrels of a pair lie within this, axis to axis */

static reader_cell *cell(const reader *r, const reader_site *s, int32_t copper)
{
    return &r->cells[s->cell + (size_t)(copper - s->first)];
}

/* ---- barrels ----------------------------------------------------------------------------------- */

typedef struct barrel_search {
    int32_t self;
} barrel_search;

/*
** Another net's barrel is copper in the bit's way, pad or no pad. A via of the same net whose span ends where this
** one's begins connects there when their copper meets: stacked or staggered micro vias.
*/
static void barrel(const reader *r, int32_t other, double gap, void *context)
{
    const reader_site *s = SITE(r, ((barrel_search *)context)->self), *o = SITE(r, other);
    int32_t from = s->first > o->first ? s->first : o->first, to = s->last < o->last ? s->last : o->last;
    if (s == o)
        return;
    if (s->net == 0 || s->net != o->net) {
        double clear = fmax(0.0, gap - 0.5 * o->drill);
        for (int32_t k = from; k <= to && clear <= REACH; k++)
            cell(r, s, k)->clear = fmin(cell(r, s, k)->clear, clear);
        return;
    }
    if (from == to && (s->first == o->last || s->last == o->first)) {
        const reader_cell *theirs = cell(r, o, from);
        double reach = 0.5 * fmax(fmax(theirs->pad, theirs->pin_pad), o->drill);
        cell(r, s, from)->own = fmin(cell(r, s, from)->own, fmax(0.0, gap - reach));
    }
}

void lstub__reader_barrels(reader *r)
{
    double widest = 0.0;
    for (size_t i = 0; i < r->sites.count; i++)
        widest = fmax(widest, SITE(r, i)->drill);
    for (int32_t i = 0; i < (int32_t)r->sites.count; i++) {
        barrel_search search = {i};
        lstub__reader_around(r, SITE(r, i)->x, SITE(r, i)->y, REACH + 0.5 * fmin(widest, 0.01), barrel, &search);
    }
}

/* ---- returns ----------------------------------------------------------------------------------- */

typedef struct return_search {
    int32_t self, count, all;
    double  gap[RETURNS_MAX], drill[RETURNS_MAX];   /* nearest first */
} return_search;

static void return_via(const reader *r, int32_t other, double gap, void *context)
{
    return_search *f = context;
    const reader_site *s = SITE(r, f->self), *o = SITE(r, other);
    int32_t at;
    if (gap > r->net[o->net].within || o->first > s->first || o->last < s->last || gap <= 0.5 * (s->drill + o->drill))
        return;
    f->all++;
    if (f->count == RETURNS_MAX && gap >= f->gap[f->count - 1])
        return;
    at = f->count < RETURNS_MAX ? f->count++ : f->count - 1;
    for (; at > 0 && f->gap[at - 1] > gap; at--) {
        f->gap[at] = f->gap[at - 1];
        f->drill[at] = f->drill[at - 1];
    }
    f->gap[at] = gap;
    f->drill[at] = o->drill;
}

/* As many of the nearest as have room on one circle: mean distance (geometric), mean drill. */
static void ring_of(reader *r, const reader_site *s, const return_search *f, lstub_via *via)
{
    for (int32_t n = f->count; n > 0; n--) {
        double logs = 0.0, drills = 0.0, unused;
        for (int32_t i = 0; i < n; i++) {
            logs += log(f->gap[i]);
            drills += f->drill[i];
        }
        double distance = lstub__tidy(exp(logs / n)), drill = lstub__tidy(drills / n);
        if (lstub_return_inductance(s->drill, n, distance, drill, &unused, NULL) < 0)
            continue;
        via->return_kind = LSTUB_RETURN_VIAS;
        via->return_count = n;
        via->return_distance = distance;
        via->return_drill = drill;
        if (n < f->all)
            lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_RETURN, 0, s->line, "hole '%.40s': %ld return vias within reach, more than one circle "
                        "holds: the nearest %ld are used", s->name, (long)f->all, (long)n);
        return;
    }
}

/* ---- pairs ------------------------------------------------------------------------------------- */

static int32_t nearest_of(const reader *r, const reader_site *s, int32_t net, double *gap)
{
    int32_t best = -1;
    *gap = PAIR_REACH;
    for (int32_t i = r->net[net].first; i >= 0; i = SITE(r, i)->next_of_net) {
        const reader_site *o = SITE(r, i);
        double d = hypot(o->x - s->x, o->y - s->y);
        if (o->first == s->first && o->last == s->last && d < *gap && d > 0.0) {
            best = i;
            *gap = d;
        }
    }
    return best;
}

static double antipad_of(const lstub_via *via, int32_t layer)
{
    for (size_t i = 0; i < via->antipad_count; i++)
        if (via->antipads[i].layer == layer)
            return via->antipads[i].value;
    return via->antipad;
}

/* One antipad around both: the same opening, or two that overlap, on any layer. */
static int shared(reader *r, int32_t a, int32_t b, double pitch)
{
    const reader_site *s = SITE(r, a), *o = SITE(r, b);
    for (int32_t k = s->first; k <= s->last; k++) {
        const reader_cell *p = cell(r, s, k), *q = cell(r, o, k);
        int32_t layer = COPPER(r, k)->stack;
        if (STACK(r, layer)->kind == LSTUB_LAYER_SIGNAL)
            continue;
        double sum = antipad_of(&r->board->holes[a].via, layer) + antipad_of(&r->board->holes[b].via, layer);
        if ((p->slot != 0 && p->slot == q->slot && (p->flags & q->flags & CELL_VOID)) || 0.5 * sum >= pitch)
            return 1;
    }
    return 0;
}

static void pair(reader *r, int32_t i)
{
    const reader_site *s = SITE(r, i);
    const reader_net *net = &r->net[s->net];
    double gap, back;
    if (net->partner < 0)
        return;
    int32_t other = nearest_of(r, s, net->partner, &gap);
    if (other < 0 || nearest_of(r, SITE(r, other), s->net, &back) != i)
        return;
    board_hole *hole = &r->board->holes[i];
    hole->partner = other;
    hole->via.pair_pitch = lstub__tidy(gap);
    hole->via.pair_kind = net->pair_kind != 0 ? net->pair_kind : shared(r, i, other, gap) ? LSTUB_PAIR_SHARED : LSTUB_PAIR_SEPARATE;
}

void lstub__reader_returns(reader *r)
{
    double within = 0.0;
    for (int32_t i = 0; i < r->nets.count; i++)
        within = fmax(within, r->net[i].within);
    for (int32_t i = 0; i < (int32_t)r->sites.count; i++) {
        const reader_site *s = SITE(r, i);
        return_search search = {.self = i};
        if (within > 0.0 && r->net[s->net].within == 0.0) {
            lstub__reader_around(r, s->x, s->y, within, return_via, &search);
            ring_of(r, s, &search, &r->board->holes[i].via);
        }
        pair(r, i);
    }
}
