#include "ipc2581/reader.h"

#include "ipc2581/text.h"

#include <string.h>

/* Dictionaries come before the CadHeader: without units of their own they wait for its, as if in micrometres. */
#define UNIT_UNKNOWN 1e-6

static void set_units(reader *r, lstub__xml *xml, const char **a)
{
    const char *units = lstub__xml_get(a, "units");
    r->dict_unit = units == NULL ? UNIT_UNKNOWN : lstub__length_unit(units);
    r->dict_raw = units == NULL && r->unit == 0.0;
    if (units == NULL && r->unit > 0.0)
        r->dict_unit = r->unit;
    if (r->dict_unit == 0.0)
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "units", "units = '%.40s': must be INCH, MILLIMETER or MICRON", units);
}

/* A new entry of a dictionary and its item; null after a failure, or (noted) when the id has been there before. */
static void *entry(reader *r, lstub__xml *xml, lstub__names *names, lstub__list *items, const char **a)
{
    const char *id = lstub__xml_text(a, "id");
    if (lstub__names_find(names, id) >= 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_TWICE, 0, lstub__xml_line(xml),
                    "dictionary entry '%.60s' comes twice: the first one is used", id);
        return NULL;
    }
    int32_t number = lstub__names_add(names, id, r->err);
    void *item = number < 0 ? NULL : lstub__list_add(items, r->err);
    if (item == NULL)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
    return item;
}

static void line_desc(reader *r, lstub__xml *xml, const char **a)
{
    reader_width *width = r->width_open ? LSTUB__ITEM(r->line_widths, reader_width, r->line_widths.count - 1) : NULL;
    if (width == NULL || !lstub__xml_optional_length(xml, a, "lineWidth", r->dict_unit, &width->width))
        return;
    width->raw = r->dict_raw;
}

static void fill_desc(reader *r, const char **a)
{
    const char *fill = lstub__xml_text(a, "fillProperty");
    if (r->width_open)
        *LSTUB__ITEM(r->fill_kinds, int, r->fill_kinds.count - 1) = lstub__fill_of(fill);
}

int lstub__fill_of(const char *property)
{
    return strcmp(property, "HOLLOW") == 0 ? FILL_HOLLOW : strcmp(property, "VOID") == 0 ? FILL_VOID : FILL_SOLID;
}

int lstub__dict_start(reader *r, lstub__xml *xml, int element, const char **a)
{
    if (r->building && lstub__shape_start(&r->builder, xml, element, a))
        return 1;
    switch (element) {
    case EL_DICT_LINE: case EL_DICT_STANDARD: case EL_DICT_USER: case EL_DICT_FILL:
        set_units(r, xml, a);
        return 1;
    case EL_ENTRY_LINE:
        r->width_open = entry(r, xml, &r->lines, &r->line_widths, a) != NULL;
        return 1;
    case EL_ENTRY_FILL:
        r->width_open = entry(r, xml, &r->fills, &r->fill_kinds, a) != NULL;
        return 1;
    case EL_ENTRY_STANDARD: case EL_ENTRY_USER:
        r->shape_kind = element == EL_ENTRY_USER;
        r->building = entry(r, xml, &r->shapes[r->shape_kind], &r->shape_list[r->shape_kind], a) != NULL ? BUILDING_ENTRY : 0;
        lstub__shape_begin(&r->builder, r->dict_unit);
        return 1;
    case EL_LINE_DESC:
        line_desc(r, xml, a);
        return 1;
    case EL_FILL_DESC:
        fill_desc(r, a);
        return 1;
    case EL_STEP_REF:
        if (r->step_ref == NULL && (r->step_ref = lstub__arena_string(r->work, lstub__xml_text(a, "name"), r->err)) == NULL)
            lstub__xml_stop(xml, LSTUB_E_MEMORY);
        return 1;
    default:
        return 0;
    }
}

void lstub__dict_end(reader *r, lstub__xml *xml, int element)
{
    if (element == EL_ENTRY_LINE || element == EL_ENTRY_FILL)
        r->width_open = 0;
    if (r->building != BUILDING_ENTRY)
        return;
    if (element != EL_ENTRY_STANDARD && element != EL_ENTRY_USER) {
        lstub__shape_end(&r->builder, element);
        return;
    }
    r->building = 0;
    lstub__list *list = &r->shape_list[r->shape_kind];
    lstub__shape *shape = LSTUB__ITEM(*list, lstub__shape, list->count - 1);
    if (!lstub__shape_take(&r->builder, shape))
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_SHAPE, 0, lstub__xml_line(xml),
                    "primitive '%.60s' has no shape known here: taken as a point", r->shapes[r->shape_kind].text[list->count - 1]);
    shape->raw = r->dict_raw;
}

static void scale_shape(lstub__shape *shape, double k)
{
    shape->x0 *= k, shape->y0 *= k, shape->x1 *= k, shape->y1 *= k;
    shape->inner *= k;
    shape->area *= k * k;
    shape->raw = 0;
}

/* The header's units are known now. */
void lstub__dict_finish(reader *r)
{
    double k = r->unit / UNIT_UNKNOWN;
    int raw = 0;
    for (size_t i = 0; i < r->line_widths.count; i++) {
        reader_width *width = LSTUB__ITEM(r->line_widths, reader_width, i);
        raw |= width->raw;
        width->width *= width->raw ? k : 1.0;
        r->widest = width->width > r->widest ? width->width : r->widest;
    }
    for (int kind = 0; kind < 2; kind++)
        for (size_t i = 0; i < r->shape_list[kind].count; i++) {
            lstub__shape *shape = LSTUB__ITEM(r->shape_list[kind], lstub__shape, i);
            raw |= shape->raw;
            if (shape->raw)
                scale_shape(shape, k);
        }
    if (raw)
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_UNITS, 0, -1, "dictionaries without units: taken in those of the CadHeader");
}
