#include "ipc2581/reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define DISAGREE 1e-3          /* relative: sums that differ by more are reported */
#define PART(n) LSTUB__ITEM(r->stack_layers, reader_stack_layer, n)

/* ---- which one, in which order ----------------------------------------------------------------- */

static int32_t choose(reader *r, int32_t *chosen)
{
    const char *wanted = r->options->stackup;
    *chosen = 0;
    if (r->stackups.count == 0)
        return lstub__fail(r->err, LSTUB_E_FORMAT, "stackup", -1, "no Stackup in the file: nothing says how thick its layers are");
    for (size_t i = 0; wanted != NULL && i < r->stackups.count; i++)
        if (strcmp(LSTUB__ITEM(r->stackups, reader_stackup, i)->name, wanted) == 0) {
            *chosen = (int32_t)i;
            return LSTUB_OK;
        }
    const reader_stackup *first = LSTUB__ITEM(r->stackups, reader_stackup, 0);
    if (wanted != NULL)
        return lstub__fail(r->err, LSTUB_E_NONE, "stackup", -1, "stackup = '%.60s': no Stackup of that name in the file (the first is '%.60s')",
                           wanted, first->name);
    if (r->stackups.count > 1)
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_STACKUP, 0, first->line, "%lu Stackups in the file: the first, '%.60s', is used",
                    (unsigned long)r->stackups.count, first->name);
    return LSTUB_OK;
}

/* By sequence over the whole stackup; by group first where a number comes twice, as each group then counts anew. */
static int comes_after(const reader_stack_layer *a, const reader_stack_layer *b, int by_group)
{
    if (by_group && a->group != b->group)
        return a->group > b->group;
    return a->sequence > b->sequence;
}

static void sort(reader *r, int32_t *order, int32_t count, int by_group)
{
    for (int32_t i = 1; i < count; i++)
        for (int32_t j = i; j > 0 && comes_after(PART(order[j - 1]), PART(order[j]), by_group); j--) {
            int32_t swap = order[j];
            order[j] = order[j - 1];
            order[j - 1] = swap;
        }
}

static void sequence(reader *r, int32_t *order, int32_t count)
{
    int missing = 0, twice = 0;
    for (int32_t i = 0; i < count; i++)
        missing |= isnan(PART(order[i])->sequence);
    if (missing) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_SEQUENCE, 0, PART(order[0])->line,
                    "StackupLayers without sequence: taken in the order of the file");
        return;
    }
    sort(r, order, count, 0);
    for (int32_t i = 1; i < count; i++)
        twice |= PART(order[i])->sequence == PART(order[i - 1])->sequence;
    if (!twice)
        return;
    sort(r, order, count, 1);
    for (int32_t i = 1; i < count; i++)
        if (PART(order[i])->sequence == PART(order[i - 1])->sequence && PART(order[i])->group == PART(order[i - 1])->group)
            lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_SEQUENCE, 1, PART(order[i])->line,
                        "StackupLayer '%.60s': sequence %g comes twice: taken in the order of the file",
                        r->layers_named.text[PART(order[i])->layer], PART(order[i])->sequence);
}

/* ---- materials --------------------------------------------------------------------------------- */

static const reader_spec *spec_of(reader *r, const reader_stack_layer *part)
{
    int32_t number = part->spec >= 0 ? part->spec : LAYER(r, part->layer)->spec;
    if (number < 0)
        return NULL;
    if (SPEC(r, number)->line != 0)
        return SPEC(r, number);
    lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_DANGLING, 1, part->line, "layer '%.60s' refers to Spec '%.60s', which is not there",
                r->layers_named.text[part->layer], r->specs_named.text[number]);
    return NULL;
}

static double loss_of(reader *r, const reader_stack_layer *part, const reader_spec *spec)
{
    const char *name = r->layers_named.text[part->layer];
    double loss = spec != NULL ? spec->loss_tangent : NAN, given = lstub__rules_defaults_of(r->rules)->loss_tangent;
    if (loss >= 0.0 && loss <= 0.5)
        return loss;
    if (!isnan(loss))
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_LOSS, 1, part->line, "layer '%.60s': loss tangent %g, must be 0 to 0.5: not used",
                    name, loss);
    if (!isnan(given)) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_LOSS, 0, part->line,
                    "layer '%.60s': no loss tangent: %g of the rules is used", name, given);
        return given;
    }
    lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_LOSS, 2, part->line, "layer '%.60s': no loss tangent in the file nor the rules: "
                "taken as lossless", name);
    return 0.0;
}

static lstub_dielectric *dielectric(reader *r, const reader_stack_layer *part, const reader_spec *spec, double dk)
{
    lstub_dielectric *d = lstub__arena_take(r->work, sizeof *d, r->err);
    double ratio = lstub__rules_defaults_of(r->rules)->in_plane_ratio, f = spec != NULL ? spec->dk_frequency : NAN;
    if (d == NULL)
        return NULL;
    LSTUB_INIT(*d);
    d->dk = dk;
    d->loss_tangent = loss_of(r, part, spec);
    if (isnan(ratio))
        lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_IN_PLANE, 0, -1,
                    "board files give no in-plane Dk and the rules no in_plane_ratio: 1 is used");
    else
        d->in_plane_ratio = ratio;
    if (f >= 1e5 && f <= 1e11)
        d->f_ref = f;
    else
        lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_FREQUENCY, isnan(f) ? 0 : 1, part->line, isnan(f)
                    ? "layer '%.60s': no frequency that its Dk belongs to: 1 GHz is used"
                    : "layer '%.60s': the frequency of its Dk must be 1e5 to 1e11 Hz: 1 GHz is used", r->layers_named.text[part->layer]);
    return d;
}

/* 1 with Dk, 0: leave the layer out, or a status. */
static int32_t dk_of(reader *r, const reader_stack_layer *part, const reader_spec *spec, double *dk)
{
    const char *name = r->layers_named.text[part->layer];
    double given = lstub__rules_defaults_of(r->rules)->dk;
    *dk = spec != NULL ? spec->dk : NAN;
    if (*dk >= 1.0 && *dk <= 1000.0) {
        if (*dk == 1.0)
            lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_DK, 2, part->line, "dielectric '%.60s': Dk = 1, as air: used as it is", name);
        return 1;
    }
    if (!isnan(*dk))
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_DK, 1, part->line, "layer '%.60s': Dk = %g, must be 1 to 1000: not used", name, *dk);
    if (!isnan(given)) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_DK, 0, part->line, "layer '%.60s': no Dk: %g of the rules is used", name, given);
        *dk = given;
        return 1;
    }
    if (LAYER(r, part->layer)->coating) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_DK, 3, part->line, "coating '%.60s': no Dk in the file nor the rules: left out", name);
        return 0;
    }
    return lstub__fail(r->err, LSTUB_E_FORMAT, "dk", part->line, "line %ld: layer '%.100s': no Dk in the file, and no 'default dk' in the rules",
                       (long)part->line, name);
}

/* A dielectric Spec on copper is the resin between its traces. Dk = 1 there is a blank form, not air. */
static int32_t copper_materials(reader *r, const reader_stack_layer *part, const reader_spec *spec, lstub_layer *layer)
{
    const char *name = r->layers_named.text[part->layer];
    double dk = spec != NULL ? spec->dk : NAN, s = spec != NULL ? spec->conductivity : NAN;
    if (dk > 1.0 && dk <= 1000.0) {
        if ((layer->dielectric = dielectric(r, part, spec, dk)) == NULL)
            return LSTUB_E_MEMORY;
    } else {
        lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_RESIN, 0, part->line, "copper layer '%.60s' says nothing of the resin in it "
                    "(no Dk above 1): that of the dielectric above is used, at the top of the one below", name);
    }
    if (s >= 1e5 && s <= 1e8) {
        lstub_conductor *c = lstub__arena_take(r->work, sizeof *c, r->err);
        if (c == NULL)
            return LSTUB_E_MEMORY;
        LSTUB_INIT(*c);
        c->conductivity = s;
        layer->conductor = c;
    } else if (!isnan(s)) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_CONDUCTIVITY, 1, part->line,
                    "copper layer '%.60s': conductivity %g S/m, must be 1e5 to 1e8: 5.8e7 is used", name, s);
    }
    return LSTUB_OK;
}

/* ---- layers ------------------------------------------------------------------------------------ */

/* Whether the part is a layer of the board at all; what is not is noted. */
static int is_part(reader *r, const reader_stack_layer *part)
{
    const reader_layer *l = LAYER(r, part->layer);
    const char *name = r->layers_named.text[part->layer];
    if (!l->declared) {
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_DANGLING, 2, part->line,
                    "StackupLayer refers to layer '%.60s', which is not there: left out", name);
        return 0;
    }
    if (l->kind == 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_NOT_BUILT, 0, part->line,
                    "layer '%.60s' (%.30s) in the Stackup is not a dielectric or copper layer of the board: left out", name, l->function);
        r->left_out += part->thickness;
        return 0;
    }
    if (l->kind != LSTUB_LAYER_DIELECTRIC && l->stack >= 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_TWICE, 7, part->line, "copper layer '%.60s' is in the Stackup twice: "
                    "the first one is used", name);
        return 0;
    }
    if (part->thickness == 0.0 && l->kind == LSTUB_LAYER_DIELECTRIC) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_DUMMY, 0, part->line, "dielectric '%.60s' has no thickness: left out", name);
        return 0;
    }
    return 1;
}

static const char *unlike(reader *r, const char *name)   /* dielectrics may stand in a stackup more than once */
{
    char other[LSTUB_NAME_MAX + 1];
    for (size_t i = 0; i < r->stack.count; i++)
        if (strcmp(STACK(r, i)->name, name) == 0) {
            lstub__format(other, sizeof other, "%.100s #%lu", name, (unsigned long)r->stack.count);
            return lstub__arena_string(r->work, other, r->err);
        }
    return name;
}

static int32_t add(reader *r, const reader_stack_layer *part)
{
    reader_layer *l = LAYER(r, part->layer);
    const reader_spec *spec;
    const char *name = r->layers_named.text[part->layer];
    double dk = NAN;
    int32_t status;
    if (!is_part(r, part))
        return LSTUB_OK;
    spec = spec_of(r, part);
    if (l->kind == LSTUB_LAYER_DIELECTRIC && (status = dk_of(r, part, spec, &dk)) <= 0)
        return status;
    if (spec != NULL && spec->layer_kind != 0 && spec->layer_kind != l->kind)
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_FUNCTION, part->layer, part->line,
                    "layer '%.60s': its Spec names another kind than its layerFunction %.30s: layerFunction is used", name, l->function);
    lstub_layer *layer = lstub__list_add(&r->stack, r->err);
    int32_t *from = layer == NULL ? NULL : lstub__list_add(&r->stack_from, r->err);
    if (from == NULL)
        return LSTUB_E_MEMORY;
    *from = part->layer;
    LSTUB_INIT(*layer);
    r->stack.count--;                      /* not yet among those compared */
    layer->name = unlike(r, name);
    r->stack.count++;
    if (layer->name == NULL)
        return LSTUB_E_MEMORY;
    layer->kind = l->kind;
    layer->thickness = part->thickness;
    layer->tol_plus = part->plus;
    layer->tol_minus = part->minus;
    if (l->stack < 0)
        l->stack = (int32_t)r->stack.count - 1;
    if (l->kind != LSTUB_LAYER_DIELECTRIC)
        return copper_materials(r, part, spec, layer);
    layer->dielectric = dielectric(r, part, spec, dk);
    return layer->dielectric == NULL ? LSTUB_E_MEMORY : LSTUB_OK;
}

static int32_t number_copper(reader *r)
{
    size_t n = 0;
    r->copper_layer = lstub__arena_take(r->work, (r->stack.count + 1) * sizeof *r->copper_layer, r->err);
    if (r->copper_layer == NULL)
        return LSTUB_E_MEMORY;
    for (size_t i = 0; i < r->stack.count; i++)
        if (STACK(r, i)->kind != LSTUB_LAYER_DIELECTRIC) {
            int32_t number = *LSTUB__ITEM(r->stack_from, int32_t, i);
            LAYER(r, number)->copper = (int32_t)n;
            r->copper_layer[n++] = number;
        }
    r->copper_count = (int32_t)n;
    return LSTUB_OK;
}

/* ---- checks ------------------------------------------------------------------------------------ */

static int upside_down(reader *r, const int32_t *order, int32_t count)
{
    int32_t first = 0, last = 0;
    for (int32_t i = 0; i < count; i++) {
        const reader_layer *l = LAYER(r, PART(order[i])->layer);
        if (l->kind != LSTUB_LAYER_DIELECTRIC && l->kind != 0) {
            first = first == 0 ? l->side : first;
            last = l->side != 0 ? l->side : last;
        }
    }
    return first == LSTUB_SIDE_BOTTOM && last == LSTUB_SIDE_TOP;
}

enum { OVER_METAL, OVER_LAMINATE, OVER_ALL };   /* copper to copper; without the outer copper; coatings and all */

static double thickness(reader *r, int over)
{
    double sum = 0.0;
    int32_t first = r->copper_count > 0 ? COPPER(r, 0)->stack : 0;
    int32_t last = r->copper_count > 0 ? COPPER(r, r->copper_count - 1)->stack : -1;
    for (int32_t i = 0; i < (int32_t)r->stack.count; i++)
        if (over == OVER_ALL || (over == OVER_METAL ? i >= first && i <= last : i > first && i < last))
            sum += STACK(r, i)->thickness;
    return sum;
}

/* By whereMeasured: METAL, LAMINATE, MASK; whatever else it says is over all. */
static void compare_thickness(reader *r, const reader_stackup *s)
{
    static const char *const words[] = {"over metal", "over laminate", "over all layers"};
    int over = strcmp(s->measured, "METAL") == 0 ? OVER_METAL : strcmp(s->measured, "LAMINATE") == 0 ? OVER_LAMINATE : OVER_ALL;
    double sum = thickness(r, over);
    char other[64] = "";
    if (!(s->overall > 0.0) || fabs(sum - s->overall) <= DISAGREE * s->overall)
        return;
    for (int i = 0; i < 3; i++)
        if (fabs(thickness(r, i) - s->overall) <= DISAGREE * s->overall)
            lstub__format(other, sizeof other, ", which they do %s", words[i]);
    if (r->left_out > 0.0 && fabs(sum + r->left_out - s->overall) <= DISAGREE * s->overall)
        lstub__format(other, sizeof other, ", which they do with those left out");
    lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_THICKNESS, 0, s->line, "Stackup '%.40s': its layers add up to %.6g mm %s, not to the "
                "overallThickness of %.6g mm%s: the layers are used", s->name, sum * 1e3, words[over], s->overall * 1e3, other);
}

int32_t lstub__reader_make_stackup(reader *r)
{
    lstub_stackup_destroy(r->board->stackup);
    r->board->stackup = NULL;
    return lstub_stackup_create(r->stack.items, r->stack.count, sizeof(lstub_layer), r->alloc, &r->board->stackup, r->err);
}

int32_t lstub__reader_lay_out(reader *r)
{
    int32_t chosen, count = 0, status = choose(r, &chosen);
    if (status < 0)
        return status;
    const reader_stackup *s = LSTUB__ITEM(r->stackups, reader_stackup, chosen);
    int32_t *order = lstub__arena_take(r->work, (r->stack_layers.count + 1) * sizeof *order, r->err);
    if (order == NULL)
        return LSTUB_E_MEMORY;
    for (size_t i = 0; i < r->stack_layers.count; i++)
        if (PART(i)->stackup == chosen)
            order[count++] = (int32_t)i;
    if (count == 0 || count > 4 * LSTUB_LAYERS_MAX)
        return lstub__fail(r->err, LSTUB_E_FORMAT, "stackup", s->line, "line %ld: Stackup '%.60s': %ld layers: must be 1 to %d", (long)s->line,
                           s->name, (long)count, 4 * LSTUB_LAYERS_MAX);
    sequence(r, order, count);
    int flip = upside_down(r, order, count);
    if (flip)
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_SEQUENCE, 2, s->line, "Stackup '%.60s': its sequence begins at the layer of side BOTTOM: "
                    "turned over, as the sides say", s->name);
    for (int32_t i = 0; i < count; i++)
        if ((status = add(r, PART(order[flip ? count - 1 - i : i]))) < 0)
            return status;
    if ((status = number_copper(r)) < 0)
        return status;
    compare_thickness(r, s);
    if (r->stack.count == 0)
        return lstub__fail(r->err, LSTUB_E_FORMAT, "stackup", s->line, "line %ld: Stackup '%.60s': none of its layers can be used",
                           (long)s->line, s->name);
    if ((status = lstub__reader_make_stackup(r)) < 0)
        lstub__fail_where(r->err, s->line, "line %ld: Stackup '%.40s'", (long)s->line, s->name);
    return status;
}
