#include "ipc2581/reader.h"

#include <math.h>
#include <string.h>

#define CELLS_MAX 40000000u    /* holes times layers: 2 GB and more beyond */
#define SAME_HOLE 1e-6         /* m */

void lstub__reader_around(const reader *r, double x, double y, double distance,
                          void (*visit)(const reader *, int32_t, double, void *), void *context)
{
    int32_t row, last, at, to;
    lstub__grid_rows(&r->grid, y - distance, y + distance, &row, &last);
    for (; row <= last; row++) {
        lstub__grid_row(&r->grid, row, x - distance, x + distance, &at, &to);
        for (; at < to; at++) {
            int32_t site = r->grid.item[at];
            double gap = hypot(r->x[site] - x, r->y[site] - y);
            if (gap <= distance)
                visit(r, site, gap, context);
        }
    }
}

/* ---- the step ---------------------------------------------------------------------------------- */

/* The step that Content refers to, if it has holes; else the first that has. */
static int32_t choose_step(reader *r)
{
    int32_t wanted = r->step_ref != NULL ? lstub__names_find(&r->steps, r->step_ref) : -1, chosen = -1;
    size_t others = 0;
    for (size_t i = 0; i < r->sites.count; i++)
        if (chosen < 0 || SITE(r, i)->step == wanted)
            chosen = SITE(r, i)->step;
    for (size_t i = 0; i < r->sites.count; i++)
        others += SITE(r, i)->step != chosen;
    if (others > 0)
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_STEP, 0, -1, "more than one Step with holes: '%.60s' is read, %lu holes of others "
                    "are not", r->steps.text[chosen], (unsigned long)others);
    if (r->step_ref != NULL && wanted < 0)
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_DANGLING, 3, -1, "Content refers to Step '%.60s', which is not there", r->step_ref);
    if (chosen < 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_HOLE, 1, -1, "no plated hole in the file: the stackup alone is read");
        chosen = wanted >= 0 ? wanted : r->steps.count > 0 ? 0 : -1;
    }
    return chosen;
}

/* ---- spans ------------------------------------------------------------------------------------- */

static void span_of(reader *r, reader_site *s)
{
    s->first = 0;
    s->last = r->copper_count - 1;
    if (s->layer < 0)
        return;
    const reader_layer *l = LAYER(r, s->layer);
    const char *name = r->layers_named.text[s->layer];
    if (l->from < 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_SPAN, s->layer, s->line,
                    "layer '%.60s' of holes %s: its holes are taken to go through the board", name, l->declared ? "has no Span" : "is not declared");
        return;
    }
    int32_t from = LAYER(r, l->from)->copper, to = LAYER(r, l->to)->copper;
    if (from < 0 || to < 0) {
        int32_t bad = from < 0 ? l->from : l->to;
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_SPAN, s->layer, s->line, "layer '%.60s' of holes spans to '%.60s', which is no copper "
                    "layer of the Stackup: its holes are taken to go through the board", name, r->layers_named.text[bad]);
        return;
    }
    s->first = from < to ? from : to;
    s->last = from < to ? to : from;
}

/* ---- once each --------------------------------------------------------------------------------- */

typedef struct twin_search {
    int32_t self;
    int     found;
} twin_search;

/* A hole of the same span that came before, or a real one where this is taken from a pad stack. */
static void is_twin(const reader *r, int32_t other, double gap, void *context)
{
    twin_search *t = context;
    const reader_site *self = SITE(r, t->self), *o = SITE(r, other);
    (void)gap;
    if (other == t->self || o->dead)
        return;
    int implied = self->ordinal < 0 && o->ordinal >= 0;
    if (implied || (o->first == self->first && o->last == self->last && other < t->self && (o->ordinal >= 0 || self->ordinal < 0)))
        t->found = 1;
}

static void drop_twins(reader *r)
{
    for (int32_t i = 0; i < (int32_t)r->sites.count; i++) {
        reader_site *s = SITE(r, i);
        twin_search t = {i, 0};
        lstub__reader_around(r, s->x, s->y, SAME_HOLE, is_twin, &t);
        s->dead = (unsigned char)t.found;
        if (t.found && s->ordinal >= 0)
            lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_SAME_HOLE, 0, s->line, "hole '%.40s' at (%.6g, %.6g) mm: another hole of the same "
                        "span is there already: not used", s->name, s->x * 1e3, s->y * 1e3);
        else if (!t.found && s->ordinal < 0)
            lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_IMPLIED, 0, s->line, "no Hole at (%.6g, %.6g) mm: taken from pad stack '%.60s', "
                        "through the board; a plan cannot be written to it", s->x * 1e3, s->y * 1e3, r->padstacks_named.text[s->padstack]);
    }
}

static void compact(reader *r, int32_t step)
{
    size_t kept = 0;
    for (size_t i = 0; i < r->sites.count; i++)
        if (SITE(r, i)->step == step && !SITE(r, i)->dead)
            *SITE(r, kept++) = *SITE(r, i);
    r->sites.count = kept;
}

static int32_t place(reader *r)
{
    lstub__grid_destroy(&r->grid);
    for (size_t i = 0; i < r->sites.count; i++) {
        r->x[i] = SITE(r, i)->x;
        r->y[i] = SITE(r, i)->y;
    }
    return lstub__grid_create(&r->grid, r->x, r->y, (int32_t)r->sites.count, REACH, r->alloc, r->err);
}

/* ---- what the rest needs ----------------------------------------------------------------------- */

static int32_t make_cells(reader *r)
{
    size_t cells = 0;
    for (size_t i = 0; i < r->sites.count; i++) {
        SITE(r, i)->cell = cells;
        cells += (size_t)(SITE(r, i)->last - SITE(r, i)->first + 1);
    }
    if (cells > CELLS_MAX)
        return lstub__fail(r->err, LSTUB_E_MEMORY, "path", -1, "%lu holes cross %lu copper layers: must be <= %u", (unsigned long)r->sites.count,
                           (unsigned long)cells, CELLS_MAX);
    r->cells = lstub__new(r->alloc, cells, sizeof *r->cells, r->err);
    if (r->cells == NULL)
        return LSTUB_E_MEMORY;
    for (size_t i = 0; i < cells; i++)
        r->cells[i].own = r->cells[i].clear = INFINITY;
    return LSTUB_OK;
}

static int32_t ask_rules(reader *r)
{
    r->net = lstub__new(r->alloc, (size_t)r->nets.count, sizeof *r->net, r->err);
    if (r->net == NULL)
        return LSTUB_E_MEMORY;
    for (int32_t i = 0; i < r->nets.count; i++) {
        reader_net *n = &r->net[i];
        const char *name = r->nets.text[i];
        size_t bytes = strlen(name) + LSTUB__SUFFIX_MAX + 1;
        n->partner = n->signal = n->first = -1;
        n->within = 0.0;
        if (r->rules == NULL || i == 0)
            continue;
        char *partner = lstub__new(r->alloc, bytes, 1, r->err);
        if (partner == NULL)
            return LSTUB_E_MEMORY;
        if (lstub__rules_pair(r->rules, name, partner, bytes, &n->pair_kind))
            n->partner = lstub__names_find(&r->nets, partner);
        lstub__free(r->alloc, partner);
        if (n->partner == i)
            n->partner = -1;
        lstub__rules_return(r->rules, name, &n->within);
        int32_t status = lstub_rules_match(r->rules, name, &n->signal, r->err);
        if (status < 0)
            return status;
    }
    for (int32_t i = (int32_t)r->sites.count - 1; i >= 0; i--) {
        SITE(r, i)->next_of_net = r->net[SITE(r, i)->net].first;
        r->net[SITE(r, i)->net].first = i;
    }
    return LSTUB_OK;
}

int32_t lstub__reader_settle(reader *r)
{
    int32_t step = choose_step(r), status;
    r->board->step = step >= 0 ? r->steps.text[step] : "";
    compact(r, step);
    r->step = step;
    for (size_t i = 0; i < r->sites.count; i++)
        span_of(r, SITE(r, i));
    r->x = lstub__new(r->alloc, r->sites.count, sizeof *r->x, r->err);
    r->y = r->x == NULL ? NULL : lstub__new(r->alloc, r->sites.count, sizeof *r->y, r->err);
    if (r->y == NULL || (status = place(r)) < 0)
        return LSTUB_E_MEMORY;
    drop_twins(r);
    compact(r, step);
    if ((status = place(r)) < 0 || (status = make_cells(r)) < 0)
        return status;
    return ask_rules(r);
}
