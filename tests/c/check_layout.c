/* Where every member of every public struct lies, written out: programs compiled against a released header count on it.
** One block per release, never edited after it; a new member may only come at the end. 64-bit machines. */
#include "check_util.h"
#include "libstub_ipc2581.h"

typedef struct place {
    const char *what;
    size_t      is, was;
} place;

#define SIZE(type, bytes)         {#type, sizeof(type), bytes}
#define AT(type, member, offset)  {#type "." #member, offsetof(type, member), offset}

/* Before 1.0 the layout may change, with LSTUB_ABI raised. */
static const place release_0_1[] = {
    SIZE(lstub_error, 344), AT(lstub_error, size, 0), AT(lstub_error, status, 8), AT(lstub_error, reserved, 12),
        AT(lstub_error, index, 16), AT(lstub_error, field, 24), AT(lstub_error, message, 88),
    SIZE(lstub_allocator, 32), AT(lstub_allocator, size, 0), AT(lstub_allocator, allocate, 8),
        AT(lstub_allocator, release, 16), AT(lstub_allocator, user, 24),
    SIZE(lstub_dielectric, 40), AT(lstub_dielectric, size, 0), AT(lstub_dielectric, dk, 8),
        AT(lstub_dielectric, in_plane_ratio, 16), AT(lstub_dielectric, loss_tangent, 24),
        AT(lstub_dielectric, f_ref, 32),
    SIZE(lstub_conductor, 32), AT(lstub_conductor, size, 0), AT(lstub_conductor, conductivity, 8),
        AT(lstub_conductor, roughness, 16), AT(lstub_conductor, roughness_law, 24), AT(lstub_conductor, reserved, 28),
    SIZE(lstub_trace, 72), AT(lstub_trace, size, 0), AT(lstub_trace, kind, 8), AT(lstub_trace, no_dispersion, 12),
        AT(lstub_trace, width, 16), AT(lstub_trace, thickness, 24), AT(lstub_trace, height_below, 32),
        AT(lstub_trace, height_above, 40), AT(lstub_trace, dielectric_below, 48), AT(lstub_trace, dielectric_above, 56),
        AT(lstub_trace, conductor, 64),
    SIZE(lstub_layer, 64), AT(lstub_layer, size, 0), AT(lstub_layer, name, 8), AT(lstub_layer, kind, 16),
        AT(lstub_layer, reserved, 20), AT(lstub_layer, thickness, 24), AT(lstub_layer, tol_plus, 32),
        AT(lstub_layer, tol_minus, 40), AT(lstub_layer, dielectric, 48), AT(lstub_layer, conductor, 56),
    SIZE(lstub_interval, 72), AT(lstub_interval, size, 0), AT(lstub_interval, thickness, 8),
        AT(lstub_interval, tol_plus, 16), AT(lstub_interval, tol_minus, 24), AT(lstub_interval, tol_rss_plus, 32),
        AT(lstub_interval, tol_rss_minus, 40), AT(lstub_interval, dk_through_plane, 48),
        AT(lstub_interval, dk_in_plane, 56), AT(lstub_interval, loss_tangent, 64),
    SIZE(lstub_on_layer, 16), AT(lstub_on_layer, layer, 0), AT(lstub_on_layer, reserved, 4),
        AT(lstub_on_layer, value, 8),
    SIZE(lstub_backdrill, 24), AT(lstub_backdrill, side, 0), AT(lstub_backdrill, reserved, 4),
        AT(lstub_backdrill, depth, 8), AT(lstub_backdrill, diameter, 16),
    SIZE(lstub_via, 288), AT(lstub_via, size, 0), AT(lstub_via, start_layer, 8), AT(lstub_via, end_layer, 12),
        AT(lstub_via, drill, 16), AT(lstub_via, pad_start, 24), AT(lstub_via, pad_inner, 32),
        AT(lstub_via, pad_end, 40), AT(lstub_via, antipad, 48), AT(lstub_via, pads, 56),
        AT(lstub_via, pad_count, 64), AT(lstub_via, antipads, 72), AT(lstub_via, antipad_count, 80),
        AT(lstub_via, clear, 88), AT(lstub_via, clear_count, 96), AT(lstub_via, nonfunctional_pads, 104),
        AT(lstub_via, return_kind, 108), AT(lstub_via, connects, 112), AT(lstub_via, connect_count, 120),
        AT(lstub_via, return_distance, 128), AT(lstub_via, return_drill, 136), AT(lstub_via, return_count, 144),
        AT(lstub_via, pair_kind, 148), AT(lstub_via, pair_pitch, 152), AT(lstub_via, backdrills, 160),
        AT(lstub_via, backdrill_count, 168), AT(lstub_via, pin_side, 176), AT(lstub_via, reserved, 180),
        AT(lstub_via, pin_length, 184), AT(lstub_via, return_xy, 192), AT(lstub_via, outside_dk, 200),
        AT(lstub_via, lid_distance, 208), AT(lstub_via, hole_dk, 216), AT(lstub_via, return_spans, 224),
        AT(lstub_via, partner_backdrills, 232), AT(lstub_via, partner_backdrill_count, 240),
        AT(lstub_via, partner_own, 248), AT(lstub_via, edge_kind, 252), AT(lstub_via, edges, 256),
    SIZE(lstub_stub, 80), AT(lstub_stub, size, 0), AT(lstub_stub, side, 8), AT(lstub_stub, exit_layer, 12),
        AT(lstub_stub, end_layer, 16), AT(lstub_stub, reserved, 20), AT(lstub_stub, top, 24),
        AT(lstub_stub, bottom, 32), AT(lstub_stub, length, 40), AT(lstub_stub, length_min, 48),
        AT(lstub_stub, length_max, 56), AT(lstub_stub, length_rss_min, 64), AT(lstub_stub, length_rss_max, 72),
    SIZE(lstub_model_options, 40), AT(lstub_model_options, size, 0), AT(lstub_model_options, fidelity, 8),
        AT(lstub_model_options, reserved, 12), AT(lstub_model_options, z_ref, 16),
        AT(lstub_model_options, annuli, 24), AT(lstub_model_options, reserved2, 28), AT(lstub_model_options, allocator, 32),
    SIZE(lstub_stub_line, 80), AT(lstub_stub_line, size, 0), AT(lstub_stub_line, fidelity, 8),
        AT(lstub_stub_line, reserved, 12), AT(lstub_stub_line, dk_effective, 16), AT(lstub_stub_line, dk_line, 24),
        AT(lstub_stub_line, impedance, 32), AT(lstub_stub_line, inductance, 40),
        AT(lstub_stub_line, capacitance, 48), AT(lstub_stub_line, end_capacitance, 56),
        AT(lstub_stub_line, stated_error, 64), AT(lstub_stub_line, f_range, 72),
    SIZE(lstub_notch, 56), AT(lstub_notch, size, 0), AT(lstub_notch, stub, 8), AT(lstub_notch, reserved, 12),
        AT(lstub_notch, f, 16), AT(lstub_notch, f_series, 24), AT(lstub_notch, depth_db, 32), AT(lstub_notch, q, 40),
        AT(lstub_notch, error, 48),
    SIZE(lstub_port, 72), AT(lstub_port, size, 0), AT(lstub_port, kind, 8), AT(lstub_port, layer, 12),
        AT(lstub_port, trace, 16), AT(lstub_port, impedance, 24), AT(lstub_port, dk, 32),
        AT(lstub_port, loss_tangent, 40), AT(lstub_port, width, 48), AT(lstub_port, distance, 56),
        AT(lstub_port, z_ref, 64),
    SIZE(lstub_transition_options, 32), AT(lstub_transition_options, size, 0), AT(lstub_transition_options, stubs, 8),
        AT(lstub_transition_options, annuli, 12), AT(lstub_transition_options, metal, 16),
        AT(lstub_transition_options, reserved, 20), AT(lstub_transition_options, f_table, 24),
    SIZE(lstub_signal, 24), AT(lstub_signal, size, 0), AT(lstub_signal, levels, 8), AT(lstub_signal, reserved, 12),
        AT(lstub_signal, symbol_rate, 16),
    SIZE(lstub_criteria, 24), AT(lstub_criteria, size, 0), AT(lstub_criteria, notch_over_nyquist, 8),
        AT(lstub_criteria, added_loss_db, 16),
    SIZE(lstub_margin, 88), AT(lstub_margin, size, 0), AT(lstub_margin, pass, 8), AT(lstub_margin, limited_by, 12),
        AT(lstub_margin, nyquist, 16), AT(lstub_margin, f1, 24), AT(lstub_margin, notch_over_nyquist, 32),
        AT(lstub_margin, notch_margin, 40), AT(lstub_margin, added_loss_db, 48),
        AT(lstub_margin, loss_margin_db, 56), AT(lstub_margin, stub_length, 64), AT(lstub_margin, rule_length, 72),
        AT(lstub_margin, rule_margin, 80),
    SIZE(lstub_stub_limit, 40), AT(lstub_stub_limit, size, 0), AT(lstub_stub_limit, limited_by, 8),
        AT(lstub_stub_limit, reserved, 12), AT(lstub_stub_limit, length, 16), AT(lstub_stub_limit, stub_length, 24),
        AT(lstub_stub_limit, margin, 32),
    SIZE(lstub_capability, 88), AT(lstub_capability, size, 0), AT(lstub_capability, sides, 8),
        AT(lstub_capability, tolerance_method, 12), AT(lstub_capability, depth_tolerance, 16),
        AT(lstub_capability, cut_clearance, 24), AT(lstub_capability, residual_min, 32),
        AT(lstub_capability, residual_target, 40), AT(lstub_capability, bit_oversize, 48),
        AT(lstub_capability, wall_clearance, 56), AT(lstub_capability, aspect_ratio, 64),
        AT(lstub_capability, depths, 72), AT(lstub_capability, depth_count, 80),
    SIZE(lstub_job, 32), AT(lstub_job, size, 0), AT(lstub_job, via, 8), AT(lstub_job, signal, 16),
        AT(lstub_job, criteria, 24),
    SIZE(lstub_drill_cut, 80), AT(lstub_drill_cut, drilled, 0), AT(lstub_drill_cut, must_not_cut, 4),
        AT(lstub_drill_cut, group, 8), AT(lstub_drill_cut, reserved, 12), AT(lstub_drill_cut, depth, 16),
        AT(lstub_drill_cut, depth_least, 24), AT(lstub_drill_cut, depth_most, 32), AT(lstub_drill_cut, diameter, 40),
        AT(lstub_drill_cut, residual, 48), AT(lstub_drill_cut, residual_least, 56),
        AT(lstub_drill_cut, residual_most, 64), AT(lstub_drill_cut, limit, 72),
    SIZE(lstub_decision, 400), AT(lstub_decision, size, 0), AT(lstub_decision, action, 8),
        AT(lstub_decision, reason, 12), AT(lstub_decision, reason_side, 16), AT(lstub_decision, reason_layer, 20),
        AT(lstub_decision, status, 24), AT(lstub_decision, stub_count, 28), AT(lstub_decision, top, 32),
        AT(lstub_decision, bottom, 112), AT(lstub_decision, stub_top, 192), AT(lstub_decision, stub_bottom, 200),
        AT(lstub_decision, reason_value, 208), AT(lstub_decision, reason_limit, 216),
        AT(lstub_decision, before, 224), AT(lstub_decision, after, 312),
    SIZE(lstub_drill_group, 56), AT(lstub_drill_group, size, 0), AT(lstub_drill_group, side, 8),
        AT(lstub_drill_group, from_layer, 12), AT(lstub_drill_group, must_not_cut, 16),
        AT(lstub_drill_group, hits, 20), AT(lstub_drill_group, diameter, 24), AT(lstub_drill_group, depth, 32),
        AT(lstub_drill_group, tolerance, 40), AT(lstub_drill_group, residual_most, 48),
    SIZE(lstub_plan_summary, 120), AT(lstub_plan_summary, size, 0), AT(lstub_plan_summary, vias, 8),
        AT(lstub_plan_summary, not_judged, 16), AT(lstub_plan_summary, keep, 24),
        AT(lstub_plan_summary, drill_top, 32), AT(lstub_plan_summary, drill_bottom, 40),
        AT(lstub_plan_summary, drill_both, 48), AT(lstub_plan_summary, cannot, 56),
        AT(lstub_plan_summary, refused, 64), AT(lstub_plan_summary, outside_range, 72),
        AT(lstub_plan_summary, depths_top, 80), AT(lstub_plan_summary, depths_bottom, 84),
        AT(lstub_plan_summary, groups, 88), AT(lstub_plan_summary, reserved, 92),
        AT(lstub_plan_summary, geometries, 96), AT(lstub_plan_summary, worst_notch_over_nyquist, 104),
        AT(lstub_plan_summary, worst_added_loss_db, 112),
    SIZE(lstub_loss_fit, 56), AT(lstub_loss_fit, size, 0), AT(lstub_loss_fit, f_low, 8), AT(lstub_loss_fit, f_high, 16),
        AT(lstub_loss_fit, constant, 24), AT(lstub_loss_fit, weighted, 28), AT(lstub_loss_fit, symbol_rate, 32),
        AT(lstub_loss_fit, transition_time, 40), AT(lstub_loss_fit, receiver_bandwidth, 48),
    SIZE(lstub_loss_deviation, 72), AT(lstub_loss_deviation, size, 0), AT(lstub_loss_deviation, a0, 8),
        AT(lstub_loss_deviation, a1, 16), AT(lstub_loss_deviation, a2, 24), AT(lstub_loss_deviation, a4, 32),
        AT(lstub_loss_deviation, rms, 40), AT(lstub_loss_deviation, greatest, 48), AT(lstub_loss_deviation, fom, 56),
        AT(lstub_loss_deviation, points, 64),
    SIZE(lstub_touchstone_row, 12), AT(lstub_touchstone_row, kind, 0), AT(lstub_touchstone_row, port, 4),
        AT(lstub_touchstone_row, partner, 8),
    SIZE(lstub_touchstone_data, 104), AT(lstub_touchstone_data, size, 0), AT(lstub_touchstone_data, version, 8),
        AT(lstub_touchstone_data, ports, 12), AT(lstub_touchstone_data, parameter, 16), AT(lstub_touchstone_data, format, 20),
        AT(lstub_touchstone_data, unit, 24), AT(lstub_touchstone_data, matrix, 28), AT(lstub_touchstone_data, order, 32),
        AT(lstub_touchstone_data, digits, 36), AT(lstub_touchstone_data, points, 40),
        AT(lstub_touchstone_data, noise_points, 48), AT(lstub_touchstone_data, freq, 56), AT(lstub_touchstone_data, data, 64),
        AT(lstub_touchstone_data, reference, 72), AT(lstub_touchstone_data, rows, 80),
        AT(lstub_touchstone_data, comments, 88), AT(lstub_touchstone_data, comment_count, 96),
    SIZE(lstub_source, 24), AT(lstub_source, size, 0), AT(lstub_source, read, 8), AT(lstub_source, user, 16),
    SIZE(lstub_sink, 24), AT(lstub_sink, size, 0), AT(lstub_sink, write, 8), AT(lstub_sink, user, 16),
    SIZE(lstub_search, 48), AT(lstub_search, size, 0), AT(lstub_search, window, 8), AT(lstub_search, f_low, 16),
        AT(lstub_search, f_high, 24), AT(lstub_search, depth_least, 32), AT(lstub_search, allocator, 40),
    SIZE(lstub_measured_notch, 96), AT(lstub_measured_notch, size, 0), AT(lstub_measured_notch, quality, 8),
        AT(lstub_measured_notch, reserved, 12), AT(lstub_measured_notch, f, 16), AT(lstub_measured_notch, f_sigma, 24),
        AT(lstub_measured_notch, depth_db, 32), AT(lstub_measured_notch, level_db, 40),
        AT(lstub_measured_notch, f_minimum, 48), AT(lstub_measured_notch, width, 56), AT(lstub_measured_notch, q, 64),
        AT(lstub_measured_notch, impedance, 72), AT(lstub_measured_notch, score, 80), AT(lstub_measured_notch, window, 88),
    SIZE(lstub_fit, 88), AT(lstub_fit, size, 0), AT(lstub_fit, describes, 8), AT(lstub_fit, dof, 12), AT(lstub_fit, ratio, 16),
        AT(lstub_fit, ratio_sigma, 24), AT(lstub_fit, ratio_low, 32), AT(lstub_fit, ratio_high, 40), AT(lstub_fit, offset, 48),
        AT(lstub_fit, offset_sigma, 56), AT(lstub_fit, offset_low, 64), AT(lstub_fit, offset_high, 72), AT(lstub_fit, chi2, 80),
    SIZE(lstub_board_options, 32), AT(lstub_board_options, size, 0), AT(lstub_board_options, stackup, 8),
        AT(lstub_board_options, progress, 16), AT(lstub_board_options, progress_user, 24),
    SIZE(lstub_hole, 72), AT(lstub_hole, size, 0), AT(lstub_hole, name, 8), AT(lstub_hole, net, 16),
        AT(lstub_hole, padstack, 24), AT(lstub_hole, kind, 32), AT(lstub_hole, signal, 36),
        AT(lstub_hole, partner, 40), AT(lstub_hole, status, 44), AT(lstub_hole, x, 48), AT(lstub_hole, y, 56),
        AT(lstub_hole, line, 64),
    SIZE(lstub_notice, 40), AT(lstub_notice, size, 0), AT(lstub_notice, severity, 8), AT(lstub_notice, reserved, 12),
        AT(lstub_notice, line, 16), AT(lstub_notice, count, 24), AT(lstub_notice, message, 32),
};

/* A released member lies where it lay; a struct is as long as it was or longer. */
START_TEST(layout_0_1)
{
    const place *p = &release_0_1[_i];
    if (sizeof(void *) != 8)
        return;
    if (strchr(p->what, '.') != NULL)
        ck_assert_msg(p->is == p->was, "%s lies at %zu, not at %zu", p->what, p->is, p->was);
    else
        ck_assert_msg(p->is >= p->was, "%s has %zu bytes, not %zu", p->what, p->is, p->was);
}
END_TEST

/* These stand in arrays or in other structs without a size of their own: they must never grow. */
START_TEST(fixed_sizes)
{
    if (sizeof(void *) != 8)
        return;
    ck_assert_uint_eq(sizeof(lstub_on_layer), 16);
    ck_assert_uint_eq(sizeof(lstub_backdrill), 24);
    ck_assert_uint_eq(sizeof(lstub_touchstone_row), 12);
    ck_assert_uint_eq(sizeof(lstub_drill_cut), 80);
    ck_assert_uint_eq(sizeof(lstub_margin), 88);           /* within lstub_decision */
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("layout");
    TCase *all = tcase_create("layout");
    tcase_add_loop_test(all, layout_0_1, 0, (int)COUNT(release_0_1));
    tcase_add_test(all, fixed_sizes);
    suite_add_tcase(suite, all);
    return test_main(suite);
}
