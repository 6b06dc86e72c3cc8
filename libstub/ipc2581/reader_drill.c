/* Back-drills that the file has already. */
#include "ipc2581/reader.h"

#include <math.h>

/* ---- from bare holes --------------------------------------------------------------------------- */

typedef struct bit_search {
    reader_bit *bit;
    int found;
} bit_search;

static void add_bit(const reader *r, int32_t site, double gap, void *context)
{
    bit_search *search = context;
    reader_site *s = SITE(r, site);
    (void)gap;
    for (int32_t i = 0; i < search->bit->spec_count && s->spec_count < SITE_SPECS; i++) {
        reader_spec *spec = SPEC(r, search->bit->specs[i]);
        s->specs[s->spec_count++] = search->bit->specs[i];
        if (isnan(spec->bit) && search->bit->diameter > 0.0)
            spec->bit = search->bit->diameter;
    }
    search->found = 1;
}

void lstub__reader_bits(reader *r)
{
    for (size_t i = 0; i < r->bits.count; i++) {
        reader_bit *bit = LSTUB__ITEM(r->bits, reader_bit, i);
        bit_search search = {bit, 0};
        int drills = 0;
        for (int32_t k = 0; k < bit->spec_count; k++)
            drills |= SPEC(r, bit->specs[k])->is_backdrill;
        if (!drills || bit->step != r->step)
            continue;
        lstub__reader_around(r, bit->x, bit->y, SAME_PLACE, add_bit, &search);
        if (!search.found)
            lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_BACKDRILL, 0, bit->line,
                        "a hole with a Backdrill specification that is on no plated hole: not used");
    }
}

/* ---- depths ------------------------------------------------------------------------------------ */

static int32_t side_of(const reader *r, const reader_spec *spec)
{
    if (spec->start_layer < 0)
        return 0;
    const reader_layer *l = LAYER(r, spec->start_layer);
    if (l->copper >= 0)
        return l->copper == 0 ? LSTUB_SIDE_TOP : l->copper == r->copper_count - 1 ? LSTUB_SIDE_BOTTOM : 0;
    return l->side;
}

/* To the near face of the must-not-cut layer, less the stub that may be left; 0: cannot be told. */
static double depth_of(reader *r, const reader_spec *spec, int32_t side, int64_t line)
{
    const lstub_stackup *stackup = r->board->stackup;
    double top, bottom, low_top, low_bottom;
    if (!isnan(spec->depth))
        return spec->depth;
    if (spec->must_not_cut < 0 || LAYER(r, spec->must_not_cut)->copper < 0)
        return 0.0;
    if (isnan(spec->max_stub))
        lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_BACKDRILL, 1, line, "Backdrill without a depth or MAX_STUB_LENGTH: taken as drilled to "
                    "the face of the must-not-cut layer '%.60s'", r->layers_named.text[spec->must_not_cut]);
    lstub_stackup_depth(stackup, LAYER(r, spec->must_not_cut)->stack, &top, &bottom, NULL);
    lstub_stackup_depth(stackup, COPPER(r, r->copper_count - 1)->stack, &low_top, &low_bottom, NULL);
    double face = side == LSTUB_SIDE_TOP ? top : low_bottom - bottom;
    return lstub__tidy(face - (isnan(spec->max_stub) ? 0.0 : spec->max_stub));
}

int32_t lstub__reader_backdrills(reader *r, const reader_site *site, lstub_via *via)
{
    lstub_backdrill found[2];
    size_t count = 0;
    for (int32_t i = 0; i < site->spec_count; i++) {
        const reader_spec *spec = SPEC(r, site->specs[i]);
        const char *name = r->specs_named.text[site->specs[i]];
        if (spec->line == 0)
            lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_DANGLING, 5, site->line, "hole '%.40s' refers to Spec '%.60s', which is not there",
                        site->name, name);
        if (!spec->is_backdrill)
            continue;
        int32_t side = side_of(r, spec);
        double depth = side != 0 ? depth_of(r, spec, side, site->line) : 0.0;
        if (depth <= 0.0 || count == 2 || (count == 1 && found[0].side == side)) {
            lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_BACKDRILL, 2, site->line, "hole '%.40s': Backdrill specification '%.60s' %s: not used",
                        site->name, name, side == 0 ? "does not start on an outer copper layer" : depth <= 0.0
                        ? "gives no depth" : "is a second one for that side");
            continue;
        }
        if (isnan(spec->bit))
            lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_BIT, 0, site->line, "Backdrill specification '%.60s' gives no bit diameter: "
                        "that of the hole is used", name);
        found[count++] = (lstub_backdrill){side, 0, depth, isnan(spec->bit) ? site->drill : spec->bit};
    }
    if (count == 0)
        return LSTUB_OK;
    lstub_backdrill *own = lstub__arena_take(r->board->arena, count * sizeof *own, r->err);
    if (own == NULL)
        return LSTUB_E_MEMORY;
    for (size_t i = 0; i < count; i++)
        own[i] = found[i];
    via->backdrills = own;
    via->backdrill_count = count;
    return LSTUB_OK;
}
