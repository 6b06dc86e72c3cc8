/* What each hole met on each layer becomes a via. */
#include "ipc2581/reader.h"

#include <math.h>
#include <string.h>

#define TOUCH 1e-7             /* m: copper nearer than this touches */

/* One via on its way; arrays by copper layer, counted from the first of its span. */
typedef struct draft {
    const reader_site *site;
    reader_cell *cells;
    int32_t count;
    int     through_pin;
    int32_t side;              /* that its component is on, 0: not known */
    double  pad[LSTUB_LAYERS_MAX], antipad[LSTUB_LAYERS_MAX];
    unsigned char connects[LSTUB_LAYERS_MAX], plane[LSTUB_LAYERS_MAX];
    lstub_on_layer list[LSTUB_LAYERS_MAX];
} draft;

double lstub__tidy(double length)
{
    return floor(length * 1e7 + 0.5) / 1e7;
}

static const char *layer_name(const reader *r, const draft *d, int32_t k)
{
    return r->layers_named.text[r->copper_layer[d->site->first + k]];
}

/* ---- pads -------------------------------------------------------------------------------------- */

static int any_pad(const draft *d)
{
    for (int32_t k = 0; k < d->count; k++)
        if (d->cells[k].pad > 0.0 || d->cells[k].pin_pad > 0.0)
            return 1;
    return 0;
}

/* Pads of the features; where there is none at all, those of the pad stack's definition. */
static void find_pads(reader *r, draft *d)
{
    const reader_site *s = d->site;
    int features = any_pad(d);
    d->through_pin = s->kind == LSTUB_HOLE_PIN || (d->cells[0].flags & d->cells[d->count - 1].flags & CELL_PIN);
    for (int32_t k = 0; k < d->count; k++) {
        const reader_cell *c = &d->cells[k];
        double pad = d->through_pin ? fmax(c->pad, c->pin_pad) : c->pad;
        if (!features) {
            const lstub__shape *shape = lstub__defined_pad(r, s->padstack, r->copper_layer[s->first + k], PAD_REGULAR);
            pad = shape != NULL ? lstub__shape_diameter(shape) : 0.0;
        }
        pad = lstub__tidy(pad);
        if (pad > 0.0 && pad <= s->drill) {
            lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_PAD_SHAPE, 1, s->line, "hole '%.40s', layer '%.40s': the pad of %.6g mm is no larger "
                        "than the hole: no pad", s->name, layer_name(r, d, k), pad * 1e3);
            pad = 0.0;
        }
        d->pad[k] = pad;
    }
}

/* ---- connections ------------------------------------------------------------------------------- */

static int32_t known_side(reader *r, draft *d)
{
    if (d->side == 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_SIDE, 0, d->site->line, "hole '%.40s': the file does not say on which side its component "
                    "is: taken as the top", d->site->name);
        d->side = LSTUB_SIDE_TOP;
    }
    return d->side;
}

/* A component's pin leads away on the side of the component; a pad on one side only, on that side. */
static void connect_pin(reader *r, draft *d)
{
    int first = d->cells[0].flags & CELL_PIN, last = d->cells[d->count - 1].flags & CELL_PIN;
    d->side = d->site->side;
    if (first && last) {
        d->connects[known_side(r, d) == LSTUB_SIDE_BOTTOM ? d->count - 1 : 0] = 1;
    } else if (first || last) {
        d->side = d->side != 0 ? d->side : first ? LSTUB_SIDE_TOP : LSTUB_SIDE_BOTTOM;
        d->connects[first ? 0 : d->count - 1] = 1;
    } else {
        for (int32_t k = 0; k < d->count; k++)
            d->connects[k] |= (d->cells[k].flags & CELL_PIN) != 0;
    }
}

static void connect_layer(reader *r, draft *d, int32_t k)
{
    const reader_site *s = d->site;
    const reader_cell *c = &d->cells[k];
    const reader_layer *l = COPPER(r, s->first + k);
    if (l->negative) {
        if (!l->has_clear || c->cut > 0.5 * s->drill)
            return;
        d->connects[k] = 1;
        if (!(c->flags & CELL_DRAWN))
            lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_NEGATIVE, r->copper_layer[s->first + k], s->line, "hole '%.40s': no clearance on "
                        "negative layer '%.40s': taken as connected to it", s->name, layer_name(r, d, k));
        return;
    }
    if (c->own <= 0.5 * fmax(d->pad[k], s->drill) + TOUCH)
        d->connects[k] = 1;
}

/* ---- planes ------------------------------------------------------------------------------------ */

/* Where the features tell nothing: the pad stack's antipad, the rules' default, or no plane. */
static double fallback(reader *r, draft *d, int32_t k, const char *why)
{
    const reader_site *s = d->site;
    int32_t layer = r->copper_layer[s->first + k];
    const lstub__shape *shape = lstub__defined_pad(r, s->padstack, layer, PAD_ANTIPAD);
    double given = lstub__rules_defaults_of(r->rules)->antipad;
    if (shape != NULL && shape->inner > 0.5 * s->drill)
        return lstub__tidy(2.0 * shape->inner);
    if (!isnan(given)) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_ANTIPAD, layer, s->line, "hole '%.40s', layer '%.40s': %s: antipad of %.6g mm by the rules",
                    s->name, layer_name(r, d, k), why, given * 1e3);
        return given;
    }
    lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_NO_PLANE, layer, s->line, "hole '%.40s', layer '%.40s': %s, and no 'default antipad' in the "
                "rules: taken as no plane at this via", s->name, layer_name(r, d, k), why);
    return 0.0;
}

/* Antipad on a layer that does not connect; 0: no plane here. */
static double antipad_on(reader *r, draft *d, int32_t k)
{
    const reader_site *s = d->site;
    const reader_cell *c = &d->cells[k];
    const reader_layer *l = COPPER(r, s->first + k);
    if (c->cut > REACH)
        return 0.0;
    if (c->cut > 0.5 * s->drill)
        return lstub__tidy(2.0 * c->cut);
    if (l->negative)
        return fallback(r, d, k, "nothing is drawn on this negative layer");
    if (c->flags & CELL_SHORT)
        return fallback(r, d, k, "copper of another net covers it");
    if (c->flags & CELL_VOID)
        return lstub__tidy(2.0 * c->room);
    if (l->kind == LSTUB_LAYER_PLANE && !l->has_area)
        return fallback(r, d, k, "this plane has no copper areas");
    return 0.0;
}

/*
** A conductor layer is a mixed one where the opening of a copper area is an antipad of some via; copper that merely
** covers a via of another net is a contradiction and makes none.
*/
void lstub__reader_kinds(reader *r)
{
    for (size_t i = 0; i < r->sites.count; i++) {
        const reader_site *s = SITE(r, i);
        for (int32_t k = s->first; k <= s->last; k++) {
            const reader_cell *c = &r->cells[s->cell + (size_t)(k - s->first)];
            lstub_layer *layer = STACK(r, COPPER(r, k)->stack);
            int plane = (c->cut > 0.5 * s->drill && c->cut <= REACH) || ((c->flags & (CELL_VOID | CELL_SHORT)) == CELL_VOID && c->room > 0.5 * s->drill);
            if (layer->kind != LSTUB_LAYER_SIGNAL || !plane)
                continue;
            layer->kind = LSTUB_LAYER_MIXED;
            lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_MIXED, 0, s->line, "conductor layer '%.60s' carries copper areas around vias: "
                        "it is a mixed layer", layer->name);
        }
    }
}

static void find_antipads(reader *r, draft *d)
{
    for (int32_t k = 0; k < d->count; k++) {
        int32_t kind = STACK(r, COPPER(r, d->site->first + k)->stack)->kind;
        d->plane[k] = kind != LSTUB_LAYER_SIGNAL && !d->connects[k];
        d->antipad[k] = d->plane[k] ? antipad_on(r, d, k) : 0.0;
        if (d->antipad[k] > 0.0 && d->antipad[k] <= d->pad[k] && COPPER(r, d->site->first + k)->negative)
            d->pad[k] = 0.0;       /* on a negative layer what is drawn is the clearance */
    }
}

/* ---- into the via ------------------------------------------------------------------------------ */

/* The value above 0 that comes most often among those that count, the first of equals; 0: there is none. */
static double usual(const double *value, const unsigned char *counts, int32_t from, int32_t to)
{
    double best = 0.0;
    int32_t most = 0;
    for (int32_t i = from; i < to; i++) {
        int32_t n = 0;
        for (int32_t j = from; j < to; j++)
            n += counts[j] && value[j] == value[i];
        if (counts[i] && value[i] > 0.0 && n > most) {
            most = n;
            best = value[i];
        }
    }
    return best;
}

static int32_t keep_list(reader *r, draft *d, size_t count, const lstub_on_layer **out, size_t *out_count)
{
    if (count == 0)
        return LSTUB_OK;
    lstub_on_layer *own = lstub__arena_take(r->board->arena, count * sizeof *own, r->err);
    if (own == NULL)
        return LSTUB_E_MEMORY;
    memcpy(own, d->list, count * sizeof *own);
    *out = own;
    *out_count = count;
    return LSTUB_OK;
}

static size_t list_value(reader *r, draft *d, size_t count, int32_t k, double value)
{
    d->list[count] = (lstub_on_layer){COPPER(r, d->site->first + k)->stack, 0, value};
    return count + 1;
}

static int32_t give_pads(reader *r, draft *d, lstub_via *via)
{
    unsigned char counts[LSTUB_LAYERS_MAX];
    size_t n = 0;
    int32_t last = d->count - 1;
    via->nonfunctional_pads = LSTUB_PADS_REMOVED;
    for (int32_t k = 1; k < last; k++)
        if (d->pad[k] > 0.0 && !d->connects[k])
            via->nonfunctional_pads = LSTUB_PADS_KEPT;
    for (int32_t k = 0; k <= last; k++)
        counts[k] = via->nonfunctional_pads == LSTUB_PADS_KEPT || d->connects[k];
    via->pad_start = d->pad[0];
    via->pad_end = d->pad[last];
    via->pad_inner = usual(d->pad, counts, 1, last);
    for (int32_t k = 1; k < last; k++)
        if (counts[k] && d->pad[k] != via->pad_inner)
            n = list_value(r, d, n, k, d->pad[k]);
    return keep_list(r, d, n, &via->pads, &via->pad_count);
}

static int32_t give_antipads(reader *r, draft *d, lstub_via *via)
{
    size_t n = 0;
    via->antipad = usual(d->antipad, d->plane, 0, d->count);
    for (int32_t k = 0; k < d->count; k++)
        if (d->plane[k] && (d->antipad[k] != via->antipad || d->antipad[k] == 0.0))
            n = list_value(r, d, n, k, d->antipad[k]);
    return keep_list(r, d, n, &via->antipads, &via->antipad_count);
}

static int32_t give_clear(reader *r, draft *d, lstub_via *via)
{
    size_t n = 0;
    for (int32_t k = 0; k < d->count; k++) {
        double clear = lstub__tidy(2.0 * d->cells[k].clear);
        if (d->cells[k].clear <= REACH && (d->antipad[k] == 0.0 || clear < d->antipad[k]))
            n = list_value(r, d, n, k, clear);
    }
    return keep_list(r, d, n, &via->clear, &via->clear_count);
}

static int32_t give_connects(reader *r, draft *d, lstub_via *via)
{
    size_t n = 0;
    for (int32_t k = 0; k < d->count; k++)
        n += d->connects[k];
    if (n == 0)
        return LSTUB_OK;
    int32_t *own = lstub__arena_take(r->board->arena, n * sizeof *own, r->err);
    if (own == NULL)
        return LSTUB_E_MEMORY;
    via->connects = own;
    via->connect_count = n;
    for (int32_t k = 0; k < d->count; k++)
        if (d->connects[k])
            *own++ = COPPER(r, d->site->first + k)->stack;
    return LSTUB_OK;
}

static int32_t fill(reader *r, draft *d, board_hole *hole)
{
    const reader_site *s = d->site;
    lstub_via *via = &hole->via;
    int32_t status;
    *hole = (board_hole){.name = s->name, .net = r->nets.text[s->net], .padstack = r->padstacks_named.text[s->padstack], .x = s->x, .y = s->y,
                         .line = s->line, .ordinal = s->ordinal, .kind = s->kind, .signal = r->net[s->net].signal, .partner = -1};
    LSTUB_INIT(*via);
    via->start_layer = COPPER(r, s->first)->stack;
    via->end_layer = COPPER(r, s->last)->stack;
    via->drill = s->drill;
    if ((status = give_connects(r, d, via)) < 0 || (status = give_pads(r, d, via)) < 0 || (status = give_antipads(r, d, via)) < 0
        || (status = give_clear(r, d, via)) < 0)
        return status;
    via->pin_length = lstub__rules_pin(r->rules, hole->padstack);
    if (via->pin_length > 0.0 || s->kind == LSTUB_HOLE_PIN)
        via->pin_side = known_side(r, d);
    return lstub__reader_backdrills(r, s, via);
}

int32_t lstub__reader_vias(reader *r)
{
    size_t count = r->sites.count;
    draft *d = lstub__new(r->alloc, 1, sizeof *d, r->err);
    int32_t status = d == NULL ? LSTUB_E_MEMORY : LSTUB_OK;
    r->board->holes = d == NULL ? NULL : lstub__new(r->alloc, count, sizeof *r->board->holes, r->err);
    if (r->board->holes == NULL)
        status = LSTUB_E_MEMORY;
    for (size_t i = 0; status == LSTUB_OK && i < count; i++) {
        d->site = SITE(r, i);
        d->cells = &r->cells[d->site->cell];
        d->count = d->site->last - d->site->first + 1;
        memset(d->connects, 0, sizeof d->connects);
        find_pads(r, d);
        for (int32_t k = 0; k < d->count; k++)
            connect_layer(r, d, k);
        connect_pin(r, d);
        find_antipads(r, d);
        status = fill(r, d, &r->board->holes[i]);
        r->board->hole_count = i + 1;
    }
    lstub__free(r->alloc, d);
    return status;
}

/* Failures are alike when the same member is at fault. */
static int32_t key_of(const char *field)
{
    uint32_t key = 0;
    for (; *field != '\0'; field++)
        key = 31u * key + (unsigned char)*field;
    return (int32_t)(key & 0x7fffffffu);
}

void lstub__reader_check(reader *r)
{
    for (size_t i = 0; i < r->board->hole_count; i++) {
        board_hole *hole = &r->board->holes[i];
        lstub_error err;
        LSTUB_INIT(err);
        hole->status = lstub_via_check(r->board->stackup, &hole->via, &err);
        if (hole->status == LSTUB_OK)
            continue;
        if (hole->via.connect_count == 0)
            lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_UNCONNECTED, 0, hole->line, "hole '%.40s', net '%.40s': nothing connects to it on any "
                        "layer: no via", hole->name, hole->net);
        else
            lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_CHECK, key_of(err.field), hole->line, "hole '%.40s', net '%.40s': no via: %s", hole->name,
                        hole->net, err.message);
    }
}
