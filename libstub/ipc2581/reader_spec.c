#include "ipc2581/reader.h"

#include "ipc2581/text.h"

#include <math.h>
#include <string.h>

/* What a Property of the open element means. */
enum {
    MEANS_NOTHING, MEANS_DK, MEANS_LOSS, MEANS_CONDUCTIVITY, MEANS_START, MEANS_MUST_NOT_CUT, MEANS_MAX_STUB, MEANS_DEPTH, MEANS_BIT,
    MEANS_LAYER_TYPE
};

int32_t lstub__spec_number(reader *r, lstub__xml *xml, const char *name)
{
    int32_t number = lstub__names_add(&r->specs_named, name, r->err);
    if (number >= 0 && (size_t)number == r->specs.count) {
        reader_spec *spec = lstub__list_add(&r->specs, r->err);
        if (spec == NULL)
            number = LSTUB_E_MEMORY;
        else
            *spec = (reader_spec){NAN, NAN, NAN, NAN, 0, -1, -1, NAN, NAN, NAN, 0, 0};
    }
    if (number < 0)
        lstub__xml_stop(xml, LSTUB_E_MEMORY);
    return number;
}

static void header(reader *r, lstub__xml *xml, const char **a)
{
    const char *units = lstub__xml_get(a, "units");
    double unit = units != NULL ? lstub__length_unit(units) : 0.0;
    if (unit == 0.0) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "units", "<CadHeader> units = '%.40s': must be INCH, MILLIMETER or MICRON",
                        units != NULL ? units : "");
        return;
    }
    if (r->unit != 0.0 && r->unit != unit) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "units", "<CadHeader> units = '%.40s': another CadHeader has other units", units);
        return;
    }
    r->unit = unit;
}

static void spec(reader *r, lstub__xml *xml, const char **a)
{
    const char *name = lstub__xml_text(a, "name");
    int32_t number = lstub__spec_number(r, xml, name);
    if (number < 0)
        return;
    r->entry = number;
    if (SPEC(r, number)->line != 0) {
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_TWICE, 1, lstub__xml_line(xml),
                    "Spec '%.60s' comes twice (first in line %ld): the first one is used", name, (long)SPEC(r, number)->line);
        r->entry = -1;
        lstub__xml_skip(xml);
        return;
    }
    SPEC(r, number)->line = lstub__xml_line(xml);
}

static int backdrill_meaning(const char **a)
{
    const char *comment = lstub__xml_text(a, "comment");
    if (lstub__xml_is(a, "type", "START_LAYER"))
        return MEANS_START;
    if (lstub__xml_is(a, "type", "MUST_NOT_CUT_LAYER"))
        return MEANS_MUST_NOT_CUT;
    if (lstub__xml_is(a, "type", "MAX_STUB_LENGTH"))
        return MEANS_MAX_STUB;
    return strcmp(comment, "TARGET_DEPTH") == 0 ? MEANS_DEPTH : strcmp(comment, "BIT_DIAMETER") == 0 ? MEANS_BIT : MEANS_NOTHING;
}

static int meaning(reader *r, int element, const char **a)
{
    if (element == EL_BACKDRILL) {
        SPEC(r, r->entry)->is_backdrill = 1;
        return backdrill_meaning(a);
    }
    if (element == EL_DIELECTRIC)
        return lstub__xml_is(a, "type", "DIELECTRIC_CONSTANT") ? MEANS_DK : lstub__xml_is(a, "type", "LOSS_TANGENT") ? MEANS_LOSS : MEANS_NOTHING;
    if (element == EL_GENERAL)
        return lstub__xml_is(a, "comment", "LAYER_TYPE") ? MEANS_LAYER_TYPE : MEANS_NOTHING;
    return lstub__xml_is(a, "type", "CONDUCTIVITY") ? MEANS_CONDUCTIVITY : MEANS_NOTHING;
}

/* The first value of a kind is the one; further ones (at other frequencies, say) are noted. */
static void take(reader *r, lstub__xml *xml, const char **a, double scale, double *value)
{
    double number = NAN;
    if (!lstub__xml_optional(xml, a, "value", &number) || isnan(number))
        return;
    if (!isnan(*value)) {
        lstub__note(&r->notices, LSTUB_NOTICE_NOTE, NOTE_TWICE, 2, lstub__xml_line(xml),
                    "Spec '%.60s' gives a value more than once: the first one is used", r->specs_named.text[r->entry]);
        return;
    }
    *value = number * scale;
}

static void take_length(reader *r, lstub__xml *xml, const char **a, double *value)
{
    const char *unit = lstub__xml_get(a, "unit");
    double scale = unit == NULL ? r->unit : lstub__length_unit(unit);
    if (scale == 0.0) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "unit", "<Property> unit = '%.40s': must be a unit of length: INCH, MM or MICRON",
                        unit != NULL ? unit : "");
        return;
    }
    take(r, xml, a, scale, value);
}

static void take_conductivity(reader *r, lstub__xml *xml, const char **a, double *value)
{
    static const struct {
        const char *unit;
        double scale;
    } units[] = {{"MHO/CM", 100.0}, {"SIEMENS/M", 1.0}, {"S/M", 1.0}, {"MHO/M", 1.0}, {"S/CM", 100.0}, {"SIEMENS/CM", 100.0}};
    const char *unit = lstub__xml_text(a, "unit");
    for (size_t i = 0; i < sizeof units / sizeof units[0]; i++)
        if (strcmp(units[i].unit, unit) == 0) {
            take(r, xml, a, units[i].scale, value);
            return;
        }
    lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_CONDUCTIVITY, 0, lstub__xml_line(xml),
                "Spec '%.60s': conductivity in '%.20s', must be MHO/CM or SIEMENS/M: not used", r->specs_named.text[r->entry], unit);
}

static void take_dk(reader *r, lstub__xml *xml, const char **a, reader_spec *s)
{
    double frequency = NAN;
    const char *unit = lstub__xml_text(a, "refUnit");
    int had = !isnan(s->dk);
    take(r, xml, a, 1.0, &s->dk);
    double scale = strcmp(unit, "HZ") == 0 ? 1.0 : strcmp(unit, "MHZ") == 0 ? 1e6 : strcmp(unit, "GHZ") == 0 ? 1e9 : 0.0;
    if (!had && scale > 0.0 && lstub__xml_optional(xml, a, "refValue", &frequency) && !isnan(frequency))
        s->dk_frequency = frequency * scale;
}

static void take_layer(reader *r, lstub__xml *xml, const char **a, int32_t *layer)
{
    const char *name = lstub__xml_get(a, "layerOrGroupRef");
    if (name == NULL)
        name = lstub__xml_get(a, "text");
    if (name == NULL)
        return;
    int32_t number = lstub__layer_number(r, xml, name);
    if (number >= 0)
        *layer = number;
}

static void property(reader *r, lstub__xml *xml, const char **a)
{
    reader_spec *s = SPEC(r, r->entry);
    switch (r->property) {
    case MEANS_DK: take_dk(r, xml, a, s); break;
    case MEANS_LOSS: take(r, xml, a, 1.0, &s->loss_tangent); break;
    case MEANS_CONDUCTIVITY: take_conductivity(r, xml, a, &s->conductivity); break;
    case MEANS_START: take_layer(r, xml, a, &s->start_layer); break;
    case MEANS_MUST_NOT_CUT: take_layer(r, xml, a, &s->must_not_cut); break;
    case MEANS_MAX_STUB: take_length(r, xml, a, &s->max_stub); break;
    case MEANS_DEPTH: take_length(r, xml, a, &s->depth); break;
    case MEANS_BIT: take_length(r, xml, a, &s->bit); break;
    case MEANS_LAYER_TYPE: s->layer_kind = lstub__function_kind(lstub__xml_text(a, "text")); break;
    default: break;
    }
}

int lstub__spec_start(reader *r, lstub__xml *xml, int element, const char **a)
{
    switch (element) {
    case EL_CAD_HEADER:
        header(r, xml, a);
        return 1;
    case EL_SPEC:
        spec(r, xml, a);
        return 1;
    case EL_DIELECTRIC: case EL_CONDUCTOR: case EL_BACKDRILL: case EL_GENERAL:
        r->property = r->entry >= 0 && lstub__xml_above(xml, 1) == EL_SPEC ? meaning(r, element, a) : MEANS_NOTHING;
        return 1;
    case EL_PROPERTY:
        if (r->entry >= 0 && r->property != MEANS_NOTHING)
            property(r, xml, a);
        return 1;
    default:
        return 0;
    }
}

void lstub__spec_end(reader *r, int element)
{
    if (element == EL_DIELECTRIC || element == EL_CONDUCTOR || element == EL_BACKDRILL || element == EL_GENERAL)
        r->property = MEANS_NOTHING;
    if (element == EL_SPEC)
        r->entry = -1;
}
