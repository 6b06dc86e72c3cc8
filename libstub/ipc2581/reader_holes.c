#include "ipc2581/reader.h"

#include <stdio.h>
#include <string.h>

#define HOLES_MAX 10000000u

static int plating(const char **a)
{
    return lstub__xml_is(a, "platingStatus", "VIA") ? LSTUB_HOLE_VIA : lstub__xml_is(a, "platingStatus", "PLATED") ? LSTUB_HOLE_PIN : 0;
}

static int32_t padstack_number(reader *r, lstub__xml *xml, const char *name)
{
    int32_t number = lstub__names_add(&r->padstacks_named, name, r->err);
    if (number >= 0 && (size_t)number == r->padstacks.count) {
        reader_padstack *p = lstub__list_add(&r->padstacks, r->err);
        if (p == NULL)
            number = LSTUB_E_MEMORY;
        else
            p->pads = -1;
    }
    if (number < 0)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
    return number;
}

/* ---- steps, components ------------------------------------------------------------------------- */

static void step(reader *r, lstub__xml *xml, const char **a)
{
    r->step = lstub__names_add(&r->steps, lstub__xml_text(a, "name"), r->err);
    if (r->step < 0)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
    else if (r->unit == 0.0)
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "units", "<Step>: no CadHeader with units before it");
}

static void component(reader *r, lstub__xml *xml, const char **a)
{
    const char *name = lstub__xml_get(a, "refDes"), *layer = lstub__xml_get(a, "layerRef");
    int32_t on = layer == NULL ? -1 : lstub__names_find(&r->layers_named, layer);
    lstub__xml_skip(xml);
    if (name == NULL || on < 0 || lstub__names_find(&r->components, name) >= 0)
        return;
    int32_t number = lstub__names_add(&r->components, name, r->err);
    int32_t *side = number < 0 ? NULL : lstub__list_add(&r->component_sides, r->err);
    if (side == NULL)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
    else
        *side = LAYER(r, on)->side;
}

/* ---- pad stack definitions --------------------------------------------------------------------- */

static void define(reader *r, lstub__xml *xml, const char **a)
{
    const char *name = lstub__xml_text(a, "name");
    int32_t number = padstack_number(r, xml, name);
    if (number < 0)
        return;
    reader_padstack *p = LSTUB__ITEM(r->padstacks, reader_padstack, number);
    if (p->line != 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_TWICE, 5, lstub__xml_line(xml),
                    "PadStackDef '%.60s' comes twice (first in line %ld): the first one is used", name, (long)p->line);
        lstub__xml_skip(xml);
        return;
    }
    p->line = lstub__xml_line(xml);
    r->pad_stack = number;
}

static void define_pad(reader *r, lstub__xml *xml, const char **a)
{
    r->pad_layer = lstub__layer_number(r, xml, lstub__xml_text(a, "layerRef"));
    r->pad_use = lstub__xml_is(a, "padUse", "ANTIPAD") ? PAD_ANTIPAD : lstub__xml_is(a, "padUse", "THERMAL") ? PAD_THERMAL : PAD_REGULAR;
    r->building = BUILDING_PAD;
    lstub__shape_begin(&r->builder, r->unit);
}

static void add_defined_pad(reader *r, lstub__xml *xml, const lstub__shape *shape)
{
    reader_padstack *p = LSTUB__ITEM(r->padstacks, reader_padstack, r->pad_stack);
    reader_padstack_pad *pad = lstub__list_add(&r->padstack_pads, r->err);
    if (pad == NULL) {
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
        return;
    }
    *pad = (reader_padstack_pad){r->pad_layer, r->pad_use, p->pads, *shape};
    p->pads = (int32_t)r->padstack_pads.count - 1;
}

const lstub__shape *lstub__find_shape(reader *r, lstub__xml *xml, int element, const char **a)
{
    int user = element == EL_USER_REF;
    const char *id = lstub__xml_text(a, "id");
    int32_t number = lstub__names_find(&r->shapes[user], id);
    if (number >= 0)
        return LSTUB__ITEM(r->shape_list[user], lstub__shape, number);
    lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_DANGLING, 0, lstub__xml_line(xml),
                "primitive '%.60s' is not in the dictionary: what refers to it is not used", id);
    return NULL;
}

static int in_definition(reader *r, lstub__xml *xml, int element, const char **a)
{
    const lstub__shape *shape;
    switch (element) {
    case EL_PAD_HOLE_DEF:
        LSTUB__ITEM(r->padstacks, reader_padstack, r->pad_stack)->kind = plating(a);
        lstub__xml_optional_length(xml, a, "diameter", r->unit, &LSTUB__ITEM(r->padstacks, reader_padstack, r->pad_stack)->drill);
        r->padstack_holes |= plating(a) != 0;
        return 1;
    case EL_PAD_PAD_DEF:
        define_pad(r, xml, a);
        return 1;
    case EL_STANDARD_REF: case EL_USER_REF:
        if (r->building && (shape = lstub__find_shape(r, xml, element, a)) != NULL)
            add_defined_pad(r, xml, shape);
        return 1;
    default:
        return r->building && lstub__shape_start(&r->builder, xml, element, a);
    }
}

/* ---- holes ------------------------------------------------------------------------------------- */

static void begin_set(reader *r, lstub__xml *xml, const char **a)
{
    r->set_net = lstub__names_add(&r->nets, lstub__xml_text(a, "net"), r->err);
    r->set_padstack = padstack_number(r, xml, lstub__xml_text(a, "geometry"));
    r->set_spec_count = 0;
    r->set_site = r->sites.count;
    r->set_bit = r->bits.count;
    if (r->set_net < 0)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
}

static void end_set(reader *r)
{
    for (size_t i = r->set_site; i < r->sites.count; i++) {
        memcpy(SITE(r, i)->specs, r->set_specs, sizeof r->set_specs);
        SITE(r, i)->spec_count = r->set_spec_count;
    }
    if (r->set_spec_count == 0)
        r->bits.count = r->set_bit;        /* plain holes without plating: of no interest */
    for (size_t i = r->set_bit; i < r->bits.count; i++) {
        reader_bit *bit = LSTUB__ITEM(r->bits, reader_bit, i);
        memcpy(bit->specs, r->set_specs, sizeof r->set_specs);
        bit->spec_count = r->set_spec_count;
    }
}

static void set_spec(reader *r, lstub__xml *xml, const char **a)
{
    int32_t number = lstub__spec_number(r, xml, lstub__xml_text(a, "id"));
    if (number < 0)
        return;
    if (r->set_spec_count < SITE_SPECS)
        r->set_specs[r->set_spec_count++] = number;
    else
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_TWICE, 6, lstub__xml_line(xml),
                    "more than %d SpecRefs in a Set: '%.60s' is not used", SITE_SPECS, lstub__xml_text(a, "id"));
}

static reader_site *add_site(reader *r, lstub__xml *xml)
{
    if (r->sites.count >= HOLES_MAX) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "path", "more than %u plated holes", HOLES_MAX);
        return NULL;
    }
    reader_site *s = lstub__list_add(&r->sites, r->err);
    if (s == NULL) {
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
        return NULL;
    }
    s->line = lstub__xml_line(xml);
    s->layer = r->layer;
    s->step = r->step;
    s->net = r->set_net;
    s->ordinal = -1;
    return s;
}

static void bare_hole(reader *r, lstub__xml *xml, const char **a)
{
    reader_bit *bit = lstub__list_add(&r->bits, r->err);
    if (bit == NULL) {
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
        return;
    }
    bit->step = r->step;
    bit->line = lstub__xml_line(xml);
    if (lstub__xml_length(xml, a, "x", r->unit, &bit->x) && lstub__xml_length(xml, a, "y", r->unit, &bit->y))
        lstub__xml_optional_length(xml, a, "diameter", r->unit, &bit->diameter);
}

static void hole(reader *r, lstub__xml *xml, const char **a)
{
    const char *stack = lstub__xml_get(a, "padstackDefRef"), *name = lstub__xml_text(a, "name");
    int32_t number = stack != NULL ? padstack_number(r, xml, stack) : r->set_padstack, kind = plating(a);
    if (number < 0)
        return;
    reader_padstack p = *LSTUB__ITEM(r->padstacks, reader_padstack, number);
    double drill = p.drill;
    r->holes_used++;
    if (lstub__xml_is(a, "platingStatus", "NONPLATED")) {
        bare_hole(r, xml, a);
        return;
    }
    if (kind == 0)
        kind = p.kind;
    if (!lstub__xml_optional_length(xml, a, "diameter", r->unit, &drill))
        return;
    if (kind == 0 || (lstub__xml_get(a, "diameter") == NULL && p.drill == 0.0)) {
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_HOLE, 0, lstub__xml_line(xml),
                    "hole '%.40s': platingStatus or diameter missing, here and in its pad stack: not used", name);
        return;
    }
    reader_site *s = add_site(r, xml);
    if (s == NULL)
        return;
    s->drill = drill;
    s->kind = kind;
    s->padstack = number;
    s->ordinal = xml->holes;
    if ((s->name = lstub__arena_string(r->board->arena, name, r->err)) == NULL)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
    else if (lstub__xml_length(xml, a, "x", r->unit, &s->x))
        lstub__xml_length(xml, a, "y", r->unit, &s->y);
}

/* Some files have no Hole at a pad whose stack has one. Once a place is enough, whatever the layer. */
static void implied_hole(reader *r, lstub__xml *xml, const char **a)
{
    char key[128];
    int32_t stack = r->pad_stack, before = r->implied.count;
    double x = 0.0, y = 0.0;
    r->pad_stack = -1;
    if (!lstub__xml_length(xml, a, "x", r->unit, &x) || !lstub__xml_length(xml, a, "y", r->unit, &y))
        return;
    snprintf(key, sizeof key, "%ld %ld %.0f %.0f", (long)r->step, (long)stack, x * 1e7, y * 1e7);
    if (lstub__names_add(&r->implied, key, r->err) < 0) {
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
        return;
    }
    if (r->implied.count == before)
        return;
    reader_padstack p = *LSTUB__ITEM(r->padstacks, reader_padstack, stack);
    reader_site *s = add_site(r, xml);
    if (s == NULL)
        return;
    s->name = "";
    s->layer = -1;
    s->padstack = stack;
    s->drill = p.drill;
    s->kind = p.kind;
    s->x = x;
    s->y = y;
}

static void layer_feature(reader *r, lstub__xml *xml, const char **a)
{
    r->layer = lstub__layer_number(r, xml, lstub__xml_text(a, "layerRef"));
    if (r->layer < 0)
        return;
    const reader_layer *l = LAYER(r, r->layer);
    int copper = l->kind == LSTUB_LAYER_SIGNAL || l->kind == LSTUB_LAYER_PLANE || l->kind == LSTUB_LAYER_MIXED;
    if (l->declared && !l->is_drill && !(copper && r->padstack_holes))
        lstub__xml_skip(xml);
    r->drills = !l->declared || l->is_drill;
}

static int in_feature(reader *r, lstub__xml *xml, int element, const char **a)
{
    switch (element) {
    case EL_SET:
        begin_set(r, xml, a);
        return 1;
    case EL_SPEC_REF:
        if (lstub__xml_above(xml, 1) == EL_SET && r->drills)
            set_spec(r, xml, a);
        return 1;
    case EL_HOLE:
        if (r->drills && lstub__xml_above(xml, 1) == EL_SET)
            hole(r, xml, a);
        return 1;
    case EL_SLOT_CAVITY:
        if (r->drills && plating(a) != 0)
            lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_SLOT, 0, lstub__xml_line(xml),
                        "plated slot '%.40s': slots are not vias, not used", lstub__xml_text(a, "name"));
        lstub__xml_skip(xml);
        return 1;
    case EL_PAD: {
        const char *stack = lstub__xml_get(a, "padstackDefRef");
        int32_t number = r->padstack_holes && stack != NULL ? lstub__names_find(&r->padstacks_named, stack) : -1;
        r->pad_stack = number >= 0 && LSTUB__ITEM(r->padstacks, reader_padstack, number)->kind != 0 ? number : -1;
        if (r->pad_stack < 0)
            lstub__xml_skip(xml);
        return 1;
    }
    case EL_LOCATION:
        if (r->pad_stack >= 0 && lstub__xml_above(xml, 1) == EL_PAD)
            implied_hole(r, xml, a);
        return 1;
    case EL_FEATURES:
        lstub__xml_skip(xml);
        return 1;
    default:
        return 0;
    }
}

int lstub__holes_start(reader *r, lstub__xml *xml, int element, const char **a)
{
    switch (element) {
    case EL_STEP:
        step(r, xml, a);
        return 1;
    case EL_STEP_REPEAT:
        lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_PANEL, 0, lstub__xml_line(xml),
                    "a panel (StepRepeat of '%.60s'): a single board of it is read", lstub__xml_text(a, "stepRef"));
        return 1;
    case EL_COMPONENT:
        component(r, xml, a);
        return 1;
    case EL_PAD_STACK_DEF:
        define(r, xml, a);
        return 1;
    case EL_LAYER_FEATURE:
        if (r->step >= 0)
            layer_feature(r, xml, a);
        else
            lstub__xml_skip(xml);
        return 1;
    default:
        if (r->layer >= 0)
            return in_feature(r, xml, element, a);
        return r->pad_stack >= 0 && in_definition(r, xml, element, a);
    }
}

void lstub__holes_end(reader *r, lstub__xml *xml, int element)
{
    lstub__shape shape;
    if (r->layer < 0 && r->pad_stack >= 0 && r->building)
        lstub__shape_end(&r->builder, element);
    switch (element) {
    case EL_PAD_PAD_DEF:
        if (r->building && r->pad_stack >= 0 && lstub__shape_take(&r->builder, &shape))
            add_defined_pad(r, xml, &shape);
        r->building = 0;
        break;
    case EL_PAD_STACK_DEF: case EL_PAD:
        r->pad_stack = -1;
        break;
    case EL_SET:
        if (r->layer >= 0)
            end_set(r);
        break;
    case EL_LAYER_FEATURE:
        r->layer = -1;
        break;
    case EL_STEP:
        r->step = -1;
        break;
    default:
        break;
    }
}
