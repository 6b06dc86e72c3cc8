#include "ipc2581/reader.h"

#include <math.h>
#include <string.h>

/* ---- what a layer is --------------------------------------------------------------------------- */

/* By layerFunction. A coating may lie outside the outer copper and may lack a Dk. */
static const struct {
    const char *function;
    int32_t kind, coating;
} functions[] = {
    {"CONDUCTOR", LSTUB_LAYER_SIGNAL, 0},     {"SIGNAL", LSTUB_LAYER_SIGNAL, 0},       {"CONDFILM", LSTUB_LAYER_SIGNAL, 0},
    {"CONDFOIL", LSTUB_LAYER_SIGNAL, 0},      {"PLANE", LSTUB_LAYER_PLANE, 0},         {"GROUND", LSTUB_LAYER_PLANE, 0},
    {"POWER", LSTUB_LAYER_PLANE, 0},          {"POWER_GROUND", LSTUB_LAYER_PLANE, 0},  {"MIXED", LSTUB_LAYER_MIXED, 0},
    {"DIELECTRIC", LSTUB_LAYER_DIELECTRIC, 0},  {"DIELBASE", LSTUB_LAYER_DIELECTRIC, 0},
    {"DIELCORE", LSTUB_LAYER_DIELECTRIC, 0},    {"DIELPREG", LSTUB_LAYER_DIELECTRIC, 0},
    {"DIELADHV", LSTUB_LAYER_DIELECTRIC, 0},    {"DIELBONDPLY", LSTUB_LAYER_DIELECTRIC, 0},
    {"DIELCOVERLAY", LSTUB_LAYER_DIELECTRIC, 0}, {"SOLDERMASK", LSTUB_LAYER_DIELECTRIC, 1},
    {"COATINGNONCOND", LSTUB_LAYER_DIELECTRIC, 1},
};
#define FUNCTIONS (sizeof functions / sizeof functions[0])

int32_t lstub__function_kind(const char *function)
{
    for (size_t i = 0; i < FUNCTIONS; i++)
        if (strcmp(functions[i].function, function) == 0)
            return functions[i].kind;
    return 0;
}

static int is_coating(const char *function)
{
    for (size_t i = 0; i < FUNCTIONS; i++)
        if (strcmp(functions[i].function, function) == 0)
            return functions[i].coating;
    return 0;
}

int32_t lstub__layer_number(reader *r, lstub__xml *xml, const char *name)
{
    int32_t number = lstub__names_add(&r->layers_named, name, r->err);
    if (number >= 0 && (size_t)number == r->layers.count) {
        reader_layer *layer = lstub__list_add(&r->layers, r->err);
        if (layer == NULL)
            number = LSTUB_E_MEMORY;
        else
            layer->from = layer->to = layer->spec = layer->stack = layer->copper = -1;
    }
    if (number < 0)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
    return number;
}

static void layer(reader *r, lstub__xml *xml, const char **a)
{
    const char *name = lstub__xml_text(a, "name"), *function = lstub__xml_text(a, "layerFunction"), *side = lstub__xml_text(a, "side");
    int32_t number = lstub__layer_number(r, xml, name);
    r->layer_entry = -1;
    if (number < 0)
        return;
    reader_layer *l = LAYER(r, number);
    if (l->declared) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_TWICE, 3, lstub__xml_line(xml),
                    "Layer '%.60s' comes twice (first in line %ld): the first one is used", name, (long)l->line);
        return;
    }
    r->layer_entry = number;
    l->declared = 1;
    l->line = lstub__xml_line(xml);
    l->kind = lstub__function_kind(function);
    l->coating = is_coating(function);
    l->is_drill = strcmp(function, "DRILL") == 0;
    l->negative = lstub__xml_is(a, "polarity", "NEGATIVE");
    l->side = strcmp(side, "TOP") == 0 ? LSTUB_SIDE_TOP : strcmp(side, "BOTTOM") == 0 ? LSTUB_SIDE_BOTTOM : 0;
    if ((l->function = lstub__arena_string(r->work, function, r->err)) == NULL)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
}

static void span(reader *r, lstub__xml *xml, const char **a)
{
    const char *from = lstub__xml_get(a, "fromLayer"), *to = lstub__xml_get(a, "toLayer");
    if (from == NULL || to == NULL)
        return;
    int32_t f = lstub__layer_number(r, xml, from), t = lstub__layer_number(r, xml, to);
    if (f < 0 || t < 0)
        return;
    LAYER(r, r->layer_entry)->from = f;
    LAYER(r, r->layer_entry)->to = t;
}

/* ---- stackups ---------------------------------------------------------------------------------- */

static void stackup(reader *r, lstub__xml *xml, const char **a)
{
    reader_stackup *s = lstub__list_add(&r->stackups, r->err);
    if (s != NULL) {
        s->name = lstub__arena_string(r->work, lstub__xml_text(a, "name"), r->err);
        s->measured = lstub__arena_string(r->work, lstub__xml_text(a, "whereMeasured"), r->err);
        s->line = lstub__xml_line(xml);
    }
    if (s == NULL || s->name == NULL || s->measured == NULL) {
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
        return;
    }
    lstub__xml_optional_length(xml, a, "overallThickness", r->unit, &s->overall);
}

static void stackup_layer(reader *r, lstub__xml *xml, const char **a)
{
    const char *name = lstub__xml_text(a, "layerOrGroupRef");
    reader_stack_layer *s = lstub__list_add(&r->stack_layers, r->err);
    int32_t number = s == NULL ? LSTUB_E_MEMORY : lstub__layer_number(r, xml, name);
    if (number < 0) {
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
        return;
    }
    s->stackup = (int32_t)r->stackups.count - 1;
    s->group = r->group;
    s->layer = number;
    s->spec = -1;
    s->sequence = NAN;
    s->line = lstub__xml_line(xml);
    int percent = lstub__xml_is(a, "tolPercent", "true");
    if (!lstub__xml_optional_length(xml, a, "thickness", r->unit, &s->thickness)
        || !lstub__xml_optional_length(xml, a, "tolPlus", percent ? 0.0 : r->unit, &s->plus)
        || !lstub__xml_optional_length(xml, a, "tolMinus", percent ? 0.0 : r->unit, &s->minus)
        || !lstub__xml_optional(xml, a, "sequence", &s->sequence))
        return;
    if (percent) {
        s->plus *= s->thickness / 100.0;
        s->minus *= s->thickness / 100.0;
    }
    s->minus = fabs(s->minus);     /* some write the lower tolerance with its sign */
    if (s->thickness < 0.0 || s->plus < 0.0)
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "thickness", "<StackupLayer> '%.60s': thickness = %g, tolPlus = %g: must be >= 0", name,
                        s->thickness / r->unit, s->plus / r->unit);
}

static void spec_ref(reader *r, lstub__xml *xml, const char **a, int32_t *spec)
{
    int32_t number = lstub__spec_number(r, xml, lstub__xml_text(a, "id"));
    if (number >= 0 && *spec < 0)
        *spec = number;
    else if (number >= 0 && number != *spec)
        lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_TWICE, 4, lstub__xml_line(xml),
                    "more than one SpecRef on a layer ('%.60s'): the first one is used", lstub__xml_text(a, "id"));
}

/* Thicknesses need a unit before they can be read. */
static int has_unit(reader *r, lstub__xml *xml)
{
    if (r->unit == 0.0)
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "units", "no CadHeader with units before this");
    return r->unit > 0.0;
}

int lstub__layers_start(reader *r, lstub__xml *xml, int element, const char **a)
{
    int above = lstub__xml_above(xml, 1);
    switch (element) {
    case EL_LAYER:
        layer(r, xml, a);
        return 1;
    case EL_SPAN:
        if (above == EL_LAYER && r->layer_entry >= 0)
            span(r, xml, a);
        return 1;
    case EL_STACKUP:
        if (has_unit(r, xml))
            stackup(r, xml, a);
        return 1;
    case EL_STACKUP_GROUP:
        r->group++;
        return 1;
    case EL_STACKUP_LAYER:
        if (r->stackups.count > 0 && has_unit(r, xml))
            stackup_layer(r, xml, a);
        return 1;
    case EL_SPEC_REF:
        if (above == EL_LAYER && r->layer_entry >= 0)
            spec_ref(r, xml, a, &LAYER(r, r->layer_entry)->spec);
        else if (above == EL_STACKUP_LAYER && r->stack_layers.count > 0)
            spec_ref(r, xml, a, &LSTUB__ITEM(r->stack_layers, reader_stack_layer, r->stack_layers.count - 1)->spec);
        return above == EL_LAYER || above == EL_STACKUP_LAYER;
    default:
        return 0;
    }
}

void lstub__layers_end(reader *r, int element)
{
    if (element == EL_LAYER)
        r->layer_entry = -1;
}
