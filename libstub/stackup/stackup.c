#include "stackup/stackup.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const lstub__range THICKNESS = {0.0, 0.1, 1, "m"}, COPPER_THICKNESS = {0.0, 0.1, 0, "m"};

/* ---- making one -------------------------------------------------------------------------------- */

static int32_t take_name(lstub_stackup *s, int32_t index, const char *name, char **room, lstub_error *err)
{
    size_t bytes = strlen(name) + 1;
    memcpy(*room, name, bytes);
    s->layer[index].name = *room;
    *room += bytes;
    for (int32_t i = 0; i < index; i++)
        if (strcmp(s->layer[i].name, name) == 0)
            return lstub__fail(err, LSTUB_E_GEOMETRY, "name", index, "name = '%.100s': layer %ld has it too", name, (long)i);
    return LSTUB_OK;
}

static int32_t check_name(const char *name, lstub_error *err)
{
    size_t bytes = 0;
    if (name == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "name", -1, "name = null: must be 1 to %d bytes", LSTUB_NAME_MAX);
    while (bytes <= LSTUB_NAME_MAX && name[bytes] != '\0')
        bytes++;
    if (bytes == 0 || bytes > LSTUB_NAME_MAX)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "name", -1, "name = '%.40s': must be 1 to %d bytes", name, LSTUB_NAME_MAX);
    return LSTUB_OK;
}

static int32_t take_thickness(lstub__layer *layer, const lstub_layer *in, lstub_error *err)
{
    int32_t status = lstub__check(in->thickness, lstub__is_copper(in->kind) ? &COPPER_THICKNESS : &THICKNESS, "thickness", err);
    if (status < 0)
        return status;
    lstub__range tolerance = {0.0, in->thickness, 0, "m"};
    if ((status = lstub__check(in->tol_plus, &tolerance, "tol_plus", err)) < 0
        || (status = lstub__check(in->tol_minus, &tolerance, "tol_minus", err)) < 0)
        return status;
    if (in->tol_minus > 0.0 && in->tol_minus >= in->thickness)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "tol_minus", -1, "tol_minus = %.9g m: must be < thickness = %.9g m",
                           in->tol_minus, in->thickness);
    layer->thickness = in->thickness;
    layer->tol_plus = in->tol_plus;
    layer->tol_minus = in->tol_minus;
    return LSTUB_OK;
}

static int32_t take_materials(lstub__layer *layer, const lstub_layer *in, lstub_error *err)
{
    int32_t status = LSTUB_OK;
    int copper = lstub__is_copper(in->kind);
    if (in->dielectric != NULL)
        status = lstub__dielectric_take(&layer->dielectric, in->dielectric, err);
    else if (!copper)
        status = lstub__fail(err, LSTUB_E_NULL, "dielectric", -1, "dielectric = null: a dielectric layer needs one");
    if (status < 0)
        return status;
    if (in->conductor != NULL && !copper)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "conductor", -1, "conductor: a dielectric layer must not have one");
    if (in->conductor != NULL)
        return lstub__conductor_take(&layer->conductor, in->conductor, err);
    LSTUB_INIT(layer->conductor);
    if (copper)
        layer->conductor.conductivity = 5.8e7;
    return LSTUB_OK;
}

static int32_t take_layer(lstub_stackup *s, int32_t index, const void *theirs, lstub_error *err)
{
    lstub_layer in;
    lstub__layer *layer = &s->layer[index];
    int32_t status = lstub__take(&in, sizeof in, theirs, sizeof in, "layer", err);
    if (status < 0)
        return status;
    if (in.kind < LSTUB_LAYER_DIELECTRIC || in.kind > LSTUB_LAYER_MIXED)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "kind", -1, "kind = %ld: must be one of LSTUB_LAYER_...", (long)in.kind);
    if (in.reserved != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld: must be 0", (long)in.reserved);
    layer->kind = in.kind;
    if ((status = take_thickness(layer, &in, err)) < 0)
        return status;
    return take_materials(layer, &in, err);
}

/* Copper layers without a resin of their own get that of the dielectric above, at the top of the one below. */
static void fill_resins(lstub_stackup *s)
{
    for (int32_t i = 0; i < s->count; i++) {
        lstub__layer *layer = &s->layer[i];
        if (layer->dielectric.size == 0) {
            int32_t from = i > 0 ? i - 1 : (i + 1 < s->count ? i + 1 : -1);
            if (from >= 0) {
                layer->dielectric = s->layer[from].dielectric;
            } else {                         /* a lone sheet of copper stands in air */
                LSTUB_INIT(layer->dielectric);
                layer->dielectric.dk = layer->dielectric.in_plane_ratio = 1.0;
                layer->dielectric.f_ref = 1e9;
            }
        }
        layer->eps = lstub__wideband_of(&layer->dielectric);
    }
}

static int32_t find_copper(lstub_stackup *s, lstub_error *err)
{
    s->first_copper = s->last_copper = -1;
    for (int32_t i = 0; i < s->count; i++) {
        if (!lstub__is_copper(s->layer[i].kind))
            continue;
        if (s->first_copper < 0)
            s->first_copper = i;
        else if (s->last_copper == i - 1)
            return lstub__fail(err, LSTUB_E_GEOMETRY, "kind", i, "layer %ld '%s' and layer %ld '%s': two copper layers "
                               "without a dielectric between them", (long)(i - 1), s->layer[i - 1].name, (long)i, s->layer[i].name);
        s->last_copper = i;
        s->copper_count++;
    }
    if (s->copper_count == 0)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "layers", -1, "layers: none of %ld is of copper", (long)s->count);
    return LSTUB_OK;
}

static void find_depths(lstub_stackup *s)
{
    double depth = 0.0;
    for (int32_t i = s->first_copper; i < s->count; i++) {
        s->layer[i].top = depth;
        s->layer[i].bottom = depth += s->layer[i].thickness;
    }
    depth = 0.0;
    for (int32_t i = s->first_copper - 1; i >= 0; i--) {
        s->layer[i].bottom = depth;
        s->layer[i].top = depth -= s->layer[i].thickness;
    }
}

static int32_t names_size(const char *layers, size_t count, size_t stride, size_t *bytes, lstub_error *err)
{
    *bytes = 0;
    for (size_t i = 0; i < count; i++) {
        lstub_layer in;
        int32_t status = lstub__take(&in, sizeof in, layers + i * stride, sizeof in, "layer", err);
        if (status == LSTUB_OK)
            status = check_name(in.name, err);
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "layer %lu", (unsigned long)i);
            return status;
        }
        *bytes += strlen(in.name) + 1;
    }
    return LSTUB_OK;
}

static int32_t fill(lstub_stackup *s, const char *layers, size_t stride, lstub_error *err)
{
    char *room = s->names;
    int32_t status = LSTUB_OK;
    for (int32_t i = 0; i < s->count; i++) {
        lstub_layer in;
        lstub__take(&in, sizeof in, layers + (size_t)i * stride, sizeof in, "layer", NULL);
        status = take_name(s, i, in.name, &room, err);
        if (status == LSTUB_OK)
            status = take_layer(s, i, layers + (size_t)i * stride, err);
        if (status < 0) {
            lstub__fail_where(err, i, "layer %ld '%s'", (long)i, s->layer[i].name);
            return status;
        }
    }
    if ((status = find_copper(s, err)) < 0)
        return status;
    fill_resins(s);
    find_depths(s);
    return LSTUB_OK;
}

int32_t lstub_stackup_create(const lstub_layer *layers, size_t count, size_t stride, const lstub_allocator *allocator,
                             lstub_stackup **out, lstub_error *err)
{
    lstub_allocator alloc;
    size_t name_bytes;
    int32_t status;
    if (lstub__need(layers, "layers", err) < 0 || lstub__need(out, "out", err) < 0)
        return LSTUB_E_NULL;
    if (count < 1 || count > LSTUB_LAYERS_MAX)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "count", -1, "count = %lu layers: must be >= 1 and <= %d",
                           (unsigned long)count, LSTUB_LAYERS_MAX);
    if ((status = lstub__stride(stride, sizeof(lstub_layer), "layers", err)) < 0
        || (status = lstub__allocator(allocator, &alloc, err)) < 0
        || (status = names_size((const char *)layers, count, stride, &name_bytes, err)) < 0)
        return status;
    lstub_stackup *s = lstub__new(&alloc, 1, sizeof *s, err);
    if (s == NULL)
        return LSTUB_E_MEMORY;
    s->alloc = alloc;
    s->count = (int32_t)count;
    s->layer = lstub__new(&alloc, count, sizeof *s->layer, err);
    s->names = s->layer == NULL ? NULL : lstub__new(&alloc, name_bytes, 1, err);
    status = s->names == NULL ? LSTUB_E_MEMORY : fill(s, (const char *)layers, stride, err);
    if (status < 0) {
        lstub_stackup_destroy(s);
        return status;
    }
    *out = s;
    return LSTUB_OK;
}

void lstub_stackup_destroy(lstub_stackup *stackup)
{
    if (stackup == NULL)
        return;
    lstub_allocator alloc = stackup->alloc;
    lstub__free(&alloc, stackup->names);
    lstub__free(&alloc, stackup->layer);
    lstub__free(&alloc, stackup);
}

/* ---- asking it --------------------------------------------------------------------------------- */

lstub__label lstub__layer_label(const lstub_stackup *stackup, int32_t index)
{
    lstub__label label;
    snprintf(label.text, sizeof label.text, "layer %ld '%s'", (long)index, stackup->layer[index].name);
    return label;
}

int32_t lstub__layer_index(const lstub_stackup *stackup, int32_t index, int copper, const char *field, lstub_error *err)
{
    if (lstub__need(stackup, "stackup", err) < 0)
        return LSTUB_E_NULL;
    if (index < 0 || index >= stackup->count)
        return lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s = %ld: must be >= 0 and < %ld layers", field, (long)index,
                           (long)stackup->count);
    if (copper && !lstub__is_copper(stackup->layer[index].kind))
        return lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s = %ld '%s': must be a copper layer", field, (long)index,
                           stackup->layer[index].name);
    return LSTUB_OK;
}

int32_t lstub_stackup_count(const lstub_stackup *stackup) { return stackup == NULL ? 0 : stackup->count; }

int32_t lstub_stackup_copper_count(const lstub_stackup *stackup) { return stackup == NULL ? 0 : stackup->copper_count; }

int32_t lstub_stackup_layer(const lstub_stackup *stackup, int32_t index, lstub_layer *out, lstub_error *err)
{
    int32_t status = lstub__layer_index(stackup, index, 0, "index", err);
    if (status < 0)
        return status;
    const lstub__layer *layer = &stackup->layer[index];
    lstub_layer ours;
    LSTUB_INIT(ours);
    ours.name = layer->name;
    ours.kind = layer->kind;
    ours.thickness = layer->thickness;
    ours.tol_plus = layer->tol_plus;
    ours.tol_minus = layer->tol_minus;
    ours.dielectric = &layer->dielectric;
    ours.conductor = lstub__is_copper(layer->kind) ? &layer->conductor : NULL;
    return lstub__give(&ours, sizeof ours, out, sizeof ours, "out", err);
}

int32_t lstub_stackup_find(const lstub_stackup *stackup, const char *name, int32_t *index, lstub_error *err)
{
    if (lstub__need(stackup, "stackup", err) < 0 || lstub__need(name, "name", err) < 0 || lstub__need(index, "index", err) < 0)
        return LSTUB_E_NULL;
    for (int32_t i = 0; i < stackup->count; i++)
        if (strcmp(stackup->layer[i].name, name) == 0) {
            *index = i;
            return LSTUB_OK;
        }
    return lstub__fail(err, LSTUB_E_NONE, "name", -1, "name = '%.100s': no layer of this stackup has it", name);
}

int32_t lstub_stackup_copper(const lstub_stackup *stackup, int32_t number, int32_t *index, lstub_error *err)
{
    if (lstub__need(stackup, "stackup", err) < 0 || lstub__need(index, "index", err) < 0)
        return LSTUB_E_NULL;
    for (int32_t i = 0, n = 0; i < stackup->count; i++)
        if (lstub__is_copper(stackup->layer[i].kind) && n++ == number) {
            *index = i;
            return LSTUB_OK;
        }
    return lstub__fail(err, LSTUB_E_ARGUMENT, "number", -1, "number = %ld: must be >= 0 and < %ld copper layers", (long)number,
                       (long)stackup->copper_count);
}

int32_t lstub_stackup_depth(const lstub_stackup *stackup, int32_t index, double *top, double *bottom, lstub_error *err)
{
    int32_t status = lstub__layer_index(stackup, index, 0, "index", err);
    if (status < 0)
        return status;
    if (top != NULL)
        *top = stackup->layer[index].top;
    if (bottom != NULL)
        *bottom = stackup->layer[index].bottom;
    return LSTUB_OK;
}

int32_t lstub_stackup_interval(const lstub_stackup *stackup, double top, double bottom, lstub_interval *out, lstub_error *err)
{
    int32_t status;
    if (lstub__need(stackup, "stackup", err) < 0)
        return LSTUB_E_NULL;
    lstub__range depth = {stackup->layer[0].top - LSTUB__SLACK, stackup->layer[stackup->count - 1].bottom + LSTUB__SLACK, 0, "m"};
    if ((status = lstub__check(top, &depth, "top", err)) < 0 || (status = lstub__check(bottom, &depth, "bottom", err)) < 0)
        return status;
    if (bottom <= top)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "bottom", -1, "bottom = %.9g m: must be > top = %.9g m", bottom, top);
    lstub_interval sum;
    double series = 0.0, square_plus = 0.0, square_minus = 0.0, loss = 0.0;
    LSTUB_INIT(sum);
    for (int32_t i = 0; i < stackup->count; i++) {
        const lstub__layer *layer = &stackup->layer[i];
        double h = fmin(bottom, layer->bottom) - fmax(top, layer->top);
        if (h <= 0.0)
            continue;
        double part = h / layer->thickness, in_plane = layer->dielectric.dk * layer->dielectric.in_plane_ratio;
        sum.thickness += h;
        sum.tol_plus += part * layer->tol_plus;
        sum.tol_minus += part * layer->tol_minus;
        square_plus += part * layer->tol_plus * part * layer->tol_plus;
        square_minus += part * layer->tol_minus * part * layer->tol_minus;
        series += h / layer->dielectric.dk;
        sum.dk_in_plane += h * in_plane;
        loss += h * in_plane * layer->dielectric.loss_tangent;
    }
    if (sum.thickness <= 0.0)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "top", -1, "top = %.9g m, bottom = %.9g m: nothing of the stackup between them", top,
                           bottom);
    sum.tol_rss_plus = sqrt(square_plus);
    sum.tol_rss_minus = sqrt(square_minus);
    sum.dk_through_plane = sum.thickness / series;
    sum.loss_tangent = loss / sum.dk_in_plane;
    sum.dk_in_plane /= sum.thickness;
    return lstub__give(&sum, sizeof sum, out, sizeof sum, "out", err);
}
