/* The structs of the header as tables: the one place of the binding that lists their members. */
#include "core.h"

#include <stdlib.h>
#include <string.h>

#define VALUE(s, m, t)          { #m, t, 0, offsetof(s, m), 0 }
#define NESTED(s, m, t, shape)  { #m, t, shape, offsetof(s, m), 0 }
#define ARRAY(s, m, c, t)       { #m, t, 0, offsetof(s, m), offsetof(s, c) }

static const core_member dielectric[] = {
    VALUE(lstub_dielectric, dk, 'd'), VALUE(lstub_dielectric, in_plane_ratio, 'd'),
    VALUE(lstub_dielectric, loss_tangent, 'd'), VALUE(lstub_dielectric, f_ref, 'd'),
};
static const core_member conductor[] = {
    VALUE(lstub_conductor, conductivity, 'd'), VALUE(lstub_conductor, roughness, 'd'),
    VALUE(lstub_conductor, roughness_law, 'i'),
};
static const core_member layer[] = {
    VALUE(lstub_layer, name, 's'), VALUE(lstub_layer, kind, 'i'), VALUE(lstub_layer, thickness, 'd'),
    VALUE(lstub_layer, tol_plus, 'd'), VALUE(lstub_layer, tol_minus, 'd'),
    NESTED(lstub_layer, dielectric, 'r', SHAPE_DIELECTRIC), NESTED(lstub_layer, conductor, 'r', SHAPE_CONDUCTOR),
};
static const core_member via[] = {
    VALUE(lstub_via, start_layer, 'i'), VALUE(lstub_via, end_layer, 'i'), VALUE(lstub_via, drill, 'd'),
    VALUE(lstub_via, pad_start, 'd'), VALUE(lstub_via, pad_inner, 'd'), VALUE(lstub_via, pad_end, 'd'),
    VALUE(lstub_via, antipad, 'd'), ARRAY(lstub_via, pads, pad_count, 'L'),
    ARRAY(lstub_via, antipads, antipad_count, 'L'), ARRAY(lstub_via, clear, clear_count, 'L'),
    VALUE(lstub_via, nonfunctional_pads, 'i'), VALUE(lstub_via, return_kind, 'i'),
    ARRAY(lstub_via, connects, connect_count, 'I'), VALUE(lstub_via, return_distance, 'd'),
    VALUE(lstub_via, return_drill, 'd'), VALUE(lstub_via, return_count, 'i'), VALUE(lstub_via, pair_kind, 'i'),
    VALUE(lstub_via, pair_pitch, 'd'), ARRAY(lstub_via, backdrills, backdrill_count, 'B'),
    VALUE(lstub_via, pin_side, 'i'), VALUE(lstub_via, pin_length, 'd'),
    ARRAY(lstub_via, return_xy, return_count, 'P'), VALUE(lstub_via, outside_dk, 'd'),
    VALUE(lstub_via, lid_distance, 'd'), VALUE(lstub_via, hole_dk, 'd'), ARRAY(lstub_via, return_spans, return_count, 'S'),
    ARRAY(lstub_via, partner_backdrills, partner_backdrill_count, 'B'), VALUE(lstub_via, partner_own, 'i'),
    VALUE(lstub_via, edge_kind, 'i'), VALUE(lstub_via, edges, 'E'),
};
static const core_member signal[] = {
    VALUE(lstub_signal, symbol_rate, 'd'), VALUE(lstub_signal, levels, 'i'),
};
static const core_member criteria[] = {
    VALUE(lstub_criteria, notch_over_nyquist, 'd'), VALUE(lstub_criteria, added_loss_db, 'd'),
};
static const core_member capability[] = {
    VALUE(lstub_capability, sides, 'i'), VALUE(lstub_capability, tolerance_method, 'i'),
    VALUE(lstub_capability, depth_tolerance, 'd'), VALUE(lstub_capability, cut_clearance, 'd'),
    VALUE(lstub_capability, residual_min, 'd'), VALUE(lstub_capability, residual_target, 'd'),
    VALUE(lstub_capability, bit_oversize, 'd'), VALUE(lstub_capability, wall_clearance, 'd'),
    VALUE(lstub_capability, aspect_ratio, 'd'), ARRAY(lstub_capability, depths, depth_count, 'D'),
};
static const core_member options[] = {
    VALUE(lstub_model_options, fidelity, 'i'), VALUE(lstub_model_options, z_ref, 'd'),
    VALUE(lstub_model_options, annuli, 'i'),
};
static const core_member job[] = {
    NESTED(lstub_job, via, 'r', SHAPE_VIA), NESTED(lstub_job, signal, 'r', SHAPE_SIGNAL),
    NESTED(lstub_job, criteria, 'r', SHAPE_CRITERIA),
};
static const core_member trace[] = {
    VALUE(lstub_trace, kind, 'i'), VALUE(lstub_trace, no_dispersion, 'i'), VALUE(lstub_trace, width, 'd'),
    VALUE(lstub_trace, thickness, 'd'), VALUE(lstub_trace, height_below, 'd'), VALUE(lstub_trace, height_above, 'd'),
    NESTED(lstub_trace, dielectric_below, 'r', SHAPE_DIELECTRIC), NESTED(lstub_trace, dielectric_above, 'r', SHAPE_DIELECTRIC),
    NESTED(lstub_trace, conductor, 'r', SHAPE_CONDUCTOR),
};
static const core_member port[] = {
    VALUE(lstub_port, kind, 'i'), VALUE(lstub_port, layer, 'i'), NESTED(lstub_port, trace, 'r', SHAPE_TRACE),
    VALUE(lstub_port, impedance, 'd'), VALUE(lstub_port, dk, 'd'), VALUE(lstub_port, loss_tangent, 'd'),
    VALUE(lstub_port, width, 'd'), VALUE(lstub_port, distance, 'd'), VALUE(lstub_port, z_ref, 'd'),
};
static const core_member transition[] = {
    VALUE(lstub_transition_options, stubs, 'i'), VALUE(lstub_transition_options, annuli, 'i'),
    VALUE(lstub_transition_options, metal, 'i'), VALUE(lstub_transition_options, f_table, 'd'),
};
static const core_member search[] = {
    VALUE(lstub_search, window, 'd'), VALUE(lstub_search, f_low, 'd'), VALUE(lstub_search, f_high, 'd'),
    VALUE(lstub_search, depth_least, 'd'),
};
static const core_member loss_fit[] = {
    VALUE(lstub_loss_fit, f_low, 'd'), VALUE(lstub_loss_fit, f_high, 'd'), VALUE(lstub_loss_fit, constant, 'i'),
    VALUE(lstub_loss_fit, weighted, 'i'), VALUE(lstub_loss_fit, symbol_rate, 'd'),
    VALUE(lstub_loss_fit, transition_time, 'd'), VALUE(lstub_loss_fit, receiver_bandwidth, 'd'),
};
static const core_member interval[] = {
    VALUE(lstub_interval, thickness, 'd'), VALUE(lstub_interval, tol_plus, 'd'), VALUE(lstub_interval, tol_minus, 'd'),
    VALUE(lstub_interval, tol_rss_plus, 'd'), VALUE(lstub_interval, tol_rss_minus, 'd'),
    VALUE(lstub_interval, dk_through_plane, 'd'), VALUE(lstub_interval, dk_in_plane, 'd'),
    VALUE(lstub_interval, loss_tangent, 'd'),
};
static const core_member stub[] = {
    VALUE(lstub_stub, side, 'i'), VALUE(lstub_stub, exit_layer, 'i'), VALUE(lstub_stub, end_layer, 'i'),
    VALUE(lstub_stub, top, 'd'), VALUE(lstub_stub, bottom, 'd'), VALUE(lstub_stub, length, 'd'),
    VALUE(lstub_stub, length_min, 'd'), VALUE(lstub_stub, length_max, 'd'), VALUE(lstub_stub, length_rss_min, 'd'),
    VALUE(lstub_stub, length_rss_max, 'd'),
};
static const core_member line[] = {
    VALUE(lstub_stub_line, fidelity, 'i'), VALUE(lstub_stub_line, dk_effective, 'd'),
    VALUE(lstub_stub_line, dk_line, 'd'), VALUE(lstub_stub_line, impedance, 'd'),
    VALUE(lstub_stub_line, inductance, 'd'), VALUE(lstub_stub_line, capacitance, 'd'),
    VALUE(lstub_stub_line, end_capacitance, 'd'), VALUE(lstub_stub_line, stated_error, 'd'),
    VALUE(lstub_stub_line, f_range, 'd'),
};
static const core_member notch[] = {
    VALUE(lstub_notch, stub, 'i'), VALUE(lstub_notch, f, 'd'), VALUE(lstub_notch, f_series, 'd'),
    VALUE(lstub_notch, depth_db, 'd'), VALUE(lstub_notch, q, 'd'), VALUE(lstub_notch, error, 'd'),
};
static const core_member margin[] = {
    VALUE(lstub_margin, pass, 'i'), VALUE(lstub_margin, limited_by, 'i'), VALUE(lstub_margin, nyquist, 'd'),
    VALUE(lstub_margin, f1, 'd'), VALUE(lstub_margin, notch_over_nyquist, 'd'), VALUE(lstub_margin, notch_margin, 'd'),
    VALUE(lstub_margin, added_loss_db, 'd'), VALUE(lstub_margin, loss_margin_db, 'd'),
    VALUE(lstub_margin, stub_length, 'd'), VALUE(lstub_margin, rule_length, 'd'), VALUE(lstub_margin, rule_margin, 'd'),
};
static const core_member limit[] = {
    VALUE(lstub_stub_limit, limited_by, 'i'), VALUE(lstub_stub_limit, length, 'd'),
    VALUE(lstub_stub_limit, stub_length, 'd'), VALUE(lstub_stub_limit, margin, 'd'),
};
static const core_member cut[] = {
    VALUE(lstub_drill_cut, drilled, 'i'), VALUE(lstub_drill_cut, must_not_cut, 'i'), VALUE(lstub_drill_cut, group, 'i'),
    VALUE(lstub_drill_cut, depth, 'd'), VALUE(lstub_drill_cut, depth_least, 'd'),
    VALUE(lstub_drill_cut, depth_most, 'd'), VALUE(lstub_drill_cut, diameter, 'd'),
    VALUE(lstub_drill_cut, residual, 'd'), VALUE(lstub_drill_cut, residual_least, 'd'),
    VALUE(lstub_drill_cut, residual_most, 'd'), VALUE(lstub_drill_cut, limit, 'd'),
};
static const core_member decision[] = {
    VALUE(lstub_decision, action, 'i'), VALUE(lstub_decision, reason, 'i'), VALUE(lstub_decision, reason_side, 'i'),
    VALUE(lstub_decision, reason_layer, 'i'), VALUE(lstub_decision, status, 'i'), VALUE(lstub_decision, stub_count, 'i'),
    NESTED(lstub_decision, top, 'n', SHAPE_CUT), NESTED(lstub_decision, bottom, 'n', SHAPE_CUT),
    VALUE(lstub_decision, stub_top, 'd'), VALUE(lstub_decision, stub_bottom, 'd'),
    VALUE(lstub_decision, reason_value, 'd'), VALUE(lstub_decision, reason_limit, 'd'),
    NESTED(lstub_decision, before, 'n', SHAPE_MARGIN), NESTED(lstub_decision, after, 'n', SHAPE_MARGIN),
};
static const core_member group[] = {
    VALUE(lstub_drill_group, side, 'i'), VALUE(lstub_drill_group, from_layer, 'i'),
    VALUE(lstub_drill_group, must_not_cut, 'i'), VALUE(lstub_drill_group, hits, 'i'),
    VALUE(lstub_drill_group, diameter, 'd'), VALUE(lstub_drill_group, depth, 'd'),
    VALUE(lstub_drill_group, tolerance, 'd'), VALUE(lstub_drill_group, residual_most, 'd'),
};
static const core_member summary[] = {
    VALUE(lstub_plan_summary, vias, 'l'), VALUE(lstub_plan_summary, not_judged, 'l'),
    VALUE(lstub_plan_summary, keep, 'l'), VALUE(lstub_plan_summary, drill_top, 'l'),
    VALUE(lstub_plan_summary, drill_bottom, 'l'), VALUE(lstub_plan_summary, drill_both, 'l'),
    VALUE(lstub_plan_summary, cannot, 'l'), VALUE(lstub_plan_summary, refused, 'l'),
    VALUE(lstub_plan_summary, outside_range, 'l'), VALUE(lstub_plan_summary, depths_top, 'i'),
    VALUE(lstub_plan_summary, depths_bottom, 'i'), VALUE(lstub_plan_summary, groups, 'i'),
    VALUE(lstub_plan_summary, geometries, 'l'), VALUE(lstub_plan_summary, worst_notch_over_nyquist, 'd'),
    VALUE(lstub_plan_summary, worst_added_loss_db, 'd'),
};
static const core_member hole[] = {
    VALUE(lstub_hole, name, 's'), VALUE(lstub_hole, net, 's'), VALUE(lstub_hole, padstack, 's'),
    VALUE(lstub_hole, kind, 'i'), VALUE(lstub_hole, signal, 'i'), VALUE(lstub_hole, partner, 'i'),
    VALUE(lstub_hole, status, 'i'), VALUE(lstub_hole, x, 'd'), VALUE(lstub_hole, y, 'd'), VALUE(lstub_hole, line, 'l'),
};
static const core_member notice[] = {
    VALUE(lstub_notice, severity, 'i'), VALUE(lstub_notice, line, 'l'), VALUE(lstub_notice, count, 'l'),
    VALUE(lstub_notice, message, 's'),
};

static const core_member measured[] = {
    VALUE(lstub_measured_notch, quality, 'i'), VALUE(lstub_measured_notch, f, 'd'), VALUE(lstub_measured_notch, f_sigma, 'd'),
    VALUE(lstub_measured_notch, depth_db, 'd'), VALUE(lstub_measured_notch, level_db, 'd'),
    VALUE(lstub_measured_notch, f_minimum, 'd'), VALUE(lstub_measured_notch, width, 'd'), VALUE(lstub_measured_notch, q, 'd'),
    VALUE(lstub_measured_notch, impedance, 'd'), VALUE(lstub_measured_notch, score, 'd'),
    VALUE(lstub_measured_notch, window, 'd'),
};
static const core_member fit[] = {
    VALUE(lstub_fit, describes, 'i'), VALUE(lstub_fit, dof, 'i'), VALUE(lstub_fit, ratio, 'd'), VALUE(lstub_fit, ratio_sigma, 'd'),
    VALUE(lstub_fit, ratio_low, 'd'), VALUE(lstub_fit, ratio_high, 'd'), VALUE(lstub_fit, offset, 'd'),
    VALUE(lstub_fit, offset_sigma, 'd'), VALUE(lstub_fit, offset_low, 'd'), VALUE(lstub_fit, offset_high, 'd'),
    VALUE(lstub_fit, chi2, 'd'),
};
static const core_member deviation[] = {
    VALUE(lstub_loss_deviation, a0, 'd'), VALUE(lstub_loss_deviation, a1, 'd'), VALUE(lstub_loss_deviation, a2, 'd'),
    VALUE(lstub_loss_deviation, a4, 'd'), VALUE(lstub_loss_deviation, rms, 'd'), VALUE(lstub_loss_deviation, greatest, 'd'),
    VALUE(lstub_loss_deviation, fom, 'd'), VALUE(lstub_loss_deviation, points, 'l'),
};

#define SHAPE(n, s) { #n, sizeof(s), sizeof n / sizeof n[0], n }

static const core_shape shapes[SHAPE_COUNT] = {
    SHAPE(dielectric, lstub_dielectric), SHAPE(conductor, lstub_conductor), SHAPE(layer, lstub_layer),
    SHAPE(via, lstub_via), SHAPE(signal, lstub_signal), SHAPE(criteria, lstub_criteria),
    SHAPE(capability, lstub_capability), SHAPE(options, lstub_model_options), SHAPE(job, lstub_job),
    SHAPE(trace, lstub_trace), SHAPE(port, lstub_port), SHAPE(transition, lstub_transition_options), SHAPE(search, lstub_search),
    SHAPE(loss_fit, lstub_loss_fit),
    SHAPE(interval, lstub_interval), SHAPE(stub, lstub_stub), SHAPE(line, lstub_stub_line), SHAPE(notch, lstub_notch),
    SHAPE(margin, lstub_margin), SHAPE(limit, lstub_stub_limit), SHAPE(cut, lstub_drill_cut),
    SHAPE(decision, lstub_decision), SHAPE(group, lstub_drill_group), SHAPE(summary, lstub_plan_summary),
    SHAPE(hole, lstub_hole), SHAPE(notice, lstub_notice), SHAPE(measured, lstub_measured_notch), SHAPE(fit, lstub_fit),
    SHAPE(deviation, lstub_loss_deviation),
};

const core_shape *core_shape_of(int shape) { return &shapes[shape]; }

int core_shape_named(core_state *state, const char *name)
{
    int i;
    for (i = 0; i < SHAPE_COUNT; i++)
        if (strcmp(shapes[i].name, name) == 0)
            return i;
    return core_bad_argument(state, "shape", "shape: there is none called '%s'", name);
}

/* ---- to Python ----------------------------------------------------------------------------------- */

static size_t count_at(const char *base, const core_member *member)
{
    size_t count;
    int32_t points;
    if (member->type == 'P' || member->type == 'S') {
        memcpy(&points, base + member->count_offset, sizeof points);
        return points > 0 ? (size_t)points : 0;
    }
    memcpy(&count, base + member->count_offset, sizeof count);
    return count;
}

static PyObject *unpack_item(char type, const void *array, size_t i)
{
    switch (type) {
    case 'D': return PyFloat_FromDouble(((const double *)array)[i]);
    case 'P': return Py_BuildValue("(dd)", ((const double *)array)[2 * i], ((const double *)array)[2 * i + 1]);
    case 'I': return PyLong_FromLong(((const int32_t *)array)[i]);
    case 'S': return Py_BuildValue("(ii)", (int)((const int32_t *)array)[2 * i], (int)((const int32_t *)array)[2 * i + 1]);
    case 'L': {
        const lstub_on_layer *item = (const lstub_on_layer *)array + i;
        return Py_BuildValue("(id)", (int)item->layer, item->value);
    }
    default: {
        const lstub_backdrill *item = (const lstub_backdrill *)array + i;
        return Py_BuildValue("(idd)", (int)item->side, item->depth, item->diameter);
    }
    }
}

static PyObject *unpack_array(char type, const void *array, size_t count)
{
    PyObject *tuple = PyTuple_New((Py_ssize_t)count);
    size_t i;
    for (i = 0; tuple != NULL && i < count; i++) {
        PyObject *item = unpack_item(type, array, i);
        if (item == NULL || PyTuple_SetItem(tuple, (Py_ssize_t)i, item) < 0)
            Py_CLEAR(tuple);
    }
    return tuple;
}

static PyObject *unpack_member(const core_member *member, const char *base)
{
    const void *at = base + member->offset, *pointer = NULL;
    double number, four[4];
    int32_t small;
    int64_t large;
    switch (member->type) {
    case 'd':
        memcpy(&number, at, sizeof number);
        return PyFloat_FromDouble(number);
    case 'i':
        memcpy(&small, at, sizeof small);
        return PyLong_FromLong(small);
    case 'l':
        memcpy(&large, at, sizeof large);
        return PyLong_FromLongLong(large);
    case 'n':
        return core_unpack(member->shape, at);
    case 'E':
        memcpy(four, at, sizeof four);
        return Py_BuildValue("(dddd)", four[0], four[1], four[2], four[3]);
    default:
        memcpy(&pointer, at, sizeof pointer);
    }
    if (member->type == 's')
        return core_text(pointer != NULL ? pointer : "");
    if (member->type != 'r')
        return unpack_array(member->type, pointer, pointer != NULL ? count_at(base, member) : 0);
    if (pointer == NULL)
        Py_RETURN_NONE;
    return core_unpack(member->shape, pointer);
}

PyObject *core_unpack(int shape, const void *data)
{
    const core_shape *table = &shapes[shape];
    PyObject *tuple = PyTuple_New((Py_ssize_t)table->members);
    size_t i;
    for (i = 0; tuple != NULL && i < table->members; i++) {
        PyObject *value = unpack_member(&table->member[i], data);
        if (value == NULL || PyTuple_SetItem(tuple, (Py_ssize_t)i, value) < 0)
            Py_CLEAR(tuple);
    }
    return tuple;
}

PyObject *core_tuple(core_state *state, const void *from, size_t count, core_item item)
{
    PyObject *tuple = PyTuple_New((Py_ssize_t)count);
    size_t i;
    for (i = 0; tuple != NULL && i < count; i++) {
        PyObject *value = item(state, from, i);
        if (value == NULL || PyTuple_SetItem(tuple, (Py_ssize_t)i, value) < 0)
            Py_CLEAR(tuple);
    }
    return tuple;
}

int core_columns(core_state *state, int shape, const void *data, size_t count, PyObject *columns)
{
    const core_shape *table = &shapes[shape];
    size_t k, i;
    if (!PyTuple_Check(columns) || (size_t)PyTuple_Size(columns) != table->members)
        return core_bad_argument(state, "columns", "columns: must be a tuple of %d buffers", (int)table->members);
    for (k = 0; k < table->members; k++) {
        const core_member *member = &table->member[k];
        size_t bytes = member->type == 'd' ? sizeof(double) : sizeof(int32_t);
        const char *from = (const char *)data + member->offset;
        core_buffer to = {0};
        if (core_buffer_write(PyTuple_GetItem(columns, (Py_ssize_t)k), member->name, member->type, count, &to) < 0)
            return -1;
        for (i = 0; i < count; i++)
            memcpy((char *)to.data + i * bytes, from + i * table->size, bytes);
        core_buffer_free(&to);
    }
    return 0;
}
