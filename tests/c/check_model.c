/* Models: limits, identities and independent forms of the same line; everything refused that should be. The errors
** against full-wave data are in tests/reference, notches in check_notches.c. */
#include "check_model.h"

/* ---- the bulk fidelity is the quarter wave of the text books ------------------------------------- */

START_TEST(bulk_is_the_quarter_wave)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_BULK);
    lstub_notch notches[16];
    size_t count = notches_of(model, 0, 300e9, notches, COUNT(notches));
    double length = length_of(model, 0), f;
    ck_assert_uint_ge(count, 5);
    for (size_t i = 0; i < count; i++) {
        assert_ok(lstub_quarter_wave_frequency(length, 3.6, (int32_t)(2 * i + 1), &f, &err), err);
        assert_close(notches[i].f, f, 1e-10, 0, "common practice, no source: odd harmonics only");
        assert_close(notches[i].f_series, f, 1e-10, 0, "identity: no loss, the notch is the zero of the reactance");
        assert_close(notches[i].depth_db, -300.0, 0, 0, "the header's floor");
        ck_assert(isinf(notches[i].q));
    }
    assert_ok(lstub_quarter_wave_frequency(length, 3.6, (int32_t)(2 * count + 1), &f, &err), err);
    ck_assert(f > 300e9);
    lstub_model_destroy(model);
}
END_TEST

START_TEST(bulk_skirt_is_that_of_the_formula)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_BULK);
    lstub_stub_line line = line_of(model, 0);
    double f1, db, z;
    assert_ok(lstub_coax(0.25e-3, 0.75e-3, 3.6, NULL, NULL, &z, &err), err);
    assert_close(line.impedance, z, 1e-9, 0, "the header: coaxial impedance");
    assert_ok(lstub_quarter_wave_frequency(length_of(model, 0), 3.6, 1, &f1, &err), err);
    for (double x = 0.05; x < 0.99; x += 0.07) {
        assert_ok(lstub_stub_skirt(line.impedance, 50, x, &db, &err), err);
        assert_close(loss_of(model, 0, x * f1), db, 1e-9, 1e-12, "lossless shunt stub, in closed form");
    }
    lstub_model_destroy(model);
}
END_TEST

/* With loss: the floor and the Q of a lossy line. */
START_TEST(bulk_floor_and_q_are_those_of_a_lossy_line)
{
    static const double losses[] = {0.002, 0.01, 0.03};
    for (size_t i = 0; i < COUNT(losses); i++) {
        lstub_via via = board_via(to_c1, 2);
        lstub_notch n[3];
        teardown();
        setup_loss(losses[i]);
        lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_BULK);
        ck_assert_uint_ge(notches_of(model, 0, 200e9, n, 3), 3);
        for (int32_t k = 0; k < 3; k++) {
            double eps[2], floor_db, zs;
            assert_ok(lstub_dielectric_permittivity(&board.dielectric, &n[k].f, 1, eps, NULL, &err), err);
            assert_ok(lstub_coax(0.25e-3, 0.75e-3, eps[0], NULL, NULL, &zs, &err), err);
            assert_ok(lstub_notch_floor(zs, 50, -eps[1] / eps[0], 2 * k + 1, &floor_db, &err), err);
            assert_close(n[k].depth_db, floor_db, 0, 0.02, "derived: floor of a lossy quarter wave");
            assert_close(n[k].q, -eps[0] / eps[1], 0.05, 0, "derived: Q = 1/tan d, to first order in the loss");
        }
        lstub_model_destroy(model);
    }
}
END_TEST

/* ---- the loaded fidelity is a uniform line with an end load -------------------------------------- */

START_TEST(loaded_line_in_another_form)
{
    lstub_via via = board_via(to_c3, 2);
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    lstub_stub_line line = line_of(model, 0);
    lstub_notch notches[6];
    double length = length_of(model, 0), want, l;
    ck_assert_int_eq(line.fidelity, LSTUB_FIDELITY_LOADED);
    assert_close(line.dk_line, C0 * C0 * line.inductance * line.capacitance, 1e-12, 0, "identity");
    assert_close(line.impedance, sqrt(line.inductance / line.capacitance), 1e-12, 0, "identity");
    assert_ok(lstub_return_inductance(via.drill, 4, 1e-3, via.drill, &l, &err), err);
    assert_close(line.inductance, l, 1e-12, 0, "the header: L' from the returns");
    size_t count = notches_of(model, 0, 300e9, notches, COUNT(notches));
    ck_assert_uint_ge(count, 3);
    for (size_t i = 0; i < count; i++) {
        assert_ok(lstub_loaded_stub_frequency(length, line.dk_line, line.impedance, line.end_capacitance, (int32_t)i + 1, &want, &err), err);
        assert_close(notches[i].f, want, 1e-9, 0, "root of cot(theta) = 2 pi f Ce Zs");
    }
    assert_close(line.dk_effective, pow(C0 / (4 * length * notches[0].f), 2), 1e-12, 0, "the header's definition");
    for (double f = 1e9; f < 100e9; f *= 1.3) {
        double theta = 2 * PI * f * length * sqrt(line.dk_line) / C0, x = -1 / (2 * PI * f * line.end_capacitance), zs = line.impedance;
        complex_value z = zin_of(model, 0, f);
        assert_close(z.im, zs * (x + zs * tan(theta)) / (zs - x * tan(theta)), 1e-7, 1e-7, "line with a load, Pozar");
        assert_close(z.re, 0, 0, 1e-9, "no loss");
    }
    lstub_model_destroy(model);
}
END_TEST

START_TEST(inductance_of_walls_and_pairs)
{
    lstub_via via = board_via(to_c3, 2);
    double l;
    via.return_kind = LSTUB_RETURN_WALL;
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    assert_close(line_of(model, 0).inductance, MU0 / (2 * PI) * log(1e-3 / 0.125e-3), 1e-12, 0, "coaxial line, textbook");
    lstub_model_destroy(model);
    via.pair_kind = LSTUB_PAIR_SEPARATE;
    via.pair_pitch = 0.9e-3;
    model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    assert_ok(lstub_twin_rod(0.25e-3, 0.9e-3, 1, &l, NULL, &err), err);
    assert_close(line_of(model, 0).inductance, l, 1e-12, 0, "two-wire line, textbook");
    lstub_model_destroy(model);
}
END_TEST

/* Thin cavities between planes, wall at the antipad's rim: nothing is left but the coaxial line. */
START_TEST(dense_planes_are_a_coaxial_line)
{
    test_board dense;
    lstub_via via = board_via(to_c1, 2);
    double c, l, z;
    board_layers(&dense, "SPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPPS", 5e-6, 35e-6);
    dense.dielectric.loss_tangent = 0;
    dense.dielectric.in_plane_ratio = 1.2;
    assert_ok(board_create(&dense, NULL, &err), err);
    via.return_kind = LSTUB_RETURN_WALL;
    via.return_distance = 0.5 * via.antipad;
    via.pad_end = 0;
    lstub_model *model = model_on(dense.stackup, &via, LSTUB_FIDELITY_LOADED);
    lstub_stub_line line = line_of(model, 0);
    assert_ok(lstub_coax(via.drill, via.antipad, 1.2 * 3.6, &c, &l, &z, &err), err);
    assert_close(line.inductance, l, 1e-12, 0, "limit: coaxial line");
    assert_close(line.capacitance, c, 0.02, 0, "limit: coaxial line, but for the open end of the last layer");
    lstub_model_destroy(model);
    lstub_stackup_destroy(dense.stackup);
}
END_TEST

/* Every cavity adds what the via-plate capacitance of its two planes gives, every plane its coaxial piece. */
START_TEST(capacitance_by_hand)
{
    test_board cells;
    lstub_via via = board_via(to_c1, 2);
    double plate, first, last, coax, total;
    board_layers(&cells, "SPPPPS", 0.2e-3, 35e-6);
    cells.dielectric.loss_tangent = 0;
    cells.dielectric.in_plane_ratio = 1.15;
    assert_ok(board_create(&cells, NULL, &err), err);
    via.pad_start = via.pad_inner = via.pad_end = 0;
    lstub_model *model = model_on(cells.stackup, &via, LSTUB_FIDELITY_LOADED);
    lstub_stub_line line = line_of(model, 0);
    assert_ok(lstub_plate_capacitance(via.drill, via.antipad, 0.2e-3, 3.6, 3.6 * 1.15, &plate, &err), err);
    assert_ok(lstub_coax(via.drill, via.antipad, 3.6 * 1.15, &coax, NULL, NULL, &err), err);
    /* Where a region has a plane at one end only (above C2 up to the outer face of C0, below C4 down to that of C5) it is
    ** half of one twice as high, by mirror image; of the first one the stub has the part below C1. */
    assert_ok(lstub_plate_capacitance(via.drill, via.antipad, 2 * 0.47e-3, 3.6, 3.6 * 1.15, &first, &err), err);
    assert_ok(lstub_plate_capacitance(via.drill, via.antipad, 2 * 0.235e-3, 3.6, 3.6 * 1.15, &last, &err), err);
    total = first * 0.2 / 0.47 + 2 * 2 * plate + 3 * coax * 35e-6 + last;
    assert_close(line.capacitance * length_of(model, 0), total, 1e-9, 0, "sum of cells by hand");
    lstub_model_destroy(model);
    lstub_stackup_destroy(cells.stackup);
}
END_TEST

/* The open end: half of a disc in free space, 8 eps0 r (textbook), outside; the ring of a pad the same in the laminate. */
START_TEST(end_capacitance_by_hand)
{
    lstub_backdrill drill = {LSTUB_SIDE_BOTTOM, 0, 0.2e-3, 0.4e-3};
    lstub_via via = board_via(to_c1, 2);
    lstub_model *padded = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED), *bare, *cut;
    via.pad_end = 0;
    bare = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    via.backdrills = &drill;
    via.backdrill_count = 1;
    cut = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    assert_close(line_of(padded, 0).end_capacitance, 4 * EPS0 * (0.25e-3 + 3.6 * 0.125e-3), 1e-9, 0, "disc in free space, by hand");
    assert_close(line_of(bare, 0).end_capacitance, 4 * EPS0 * 0.125e-3, 1e-9, 0, "disc in free space, by hand");
    assert_close(line_of(cut, 0).end_capacitance, 4 * EPS0 * 0.125e-3, 1e-9, 0, "disc in free space, by hand");
    lstub_model_destroy(padded);
    lstub_model_destroy(bare);
    lstub_model_destroy(cut);
}
END_TEST

/* ---- identities that any fidelity must keep ------------------------------------------------------ */

START_TEST(one_line_in_four_functions)
{
    for (uint64_t i = 0; i < 60; i++) {
        int32_t connects[2];
        lstub_via via = random_via(1, i, connects);
        lstub_model *model = model_on(board.stackup, &via, 1 + (int32_t)(i % 2));
        for (double f = 1e8; f < 2e11; f *= 1.9) {
            double y[2] = {0, 0}, s21[2], loss;
            for (int32_t s = 0; s < lstub_model_stub_count(model); s++) {
                complex_value z = zin_of(model, s, f);
                double d = z.re * z.re + z.im * z.im;
                ck_assert_msg(z.re >= 0, "a stub that gives energy: Re Zin = %.17g", z.re);
                y[0] += z.re / d;
                y[1] -= z.im / d;
            }
            ck_assert_int_ge(lstub_model_s21(model, LSTUB_ALL_STUBS, &f, 1, s21, NULL, &err), 0);
            double re = 2 + 50 * y[0], im = 50 * y[1], d = re * re + im * im;
            assert_close(s21[0], 2 * re / d, 1e-11, 1e-13, "identity: shunts in parallel, 2/(2 + Z0 Y)");
            assert_close(s21[1], -2 * im / d, 1e-11, 1e-13, "identity: shunts in parallel, 2/(2 + Z0 Y)");
            loss = loss_of(model, LSTUB_ALL_STUBS, f);
            ck_assert(loss >= 0);
            assert_close(loss, -20 * log10(hypot(s21[0], s21[1])), 1e-9, 1e-12, "identity");
        }
        lstub_model_destroy(model);
    }
}
END_TEST

/* Twice the size, half the frequency: Maxwell's equations have no length of their own. Without loss. */
START_TEST(scale)
{
    test_board twice;
    board_layers(&twice, "SPSPSPPS", 0.4e-3, 70e-6);
    twice.dielectric.loss_tangent = 0;
    assert_ok(board_create(&twice, NULL, &err), err);
    for (uint64_t i = 0; i < 50; i++) {
        int32_t connects[2];
        lstub_via via = random_via(2, i, connects), big;
        if (via.return_kind == LSTUB_RETURN_NONE)
            continue;
        big = via;
        big.drill *= 2, big.antipad *= 2, big.return_distance *= 2;
        big.pad_start *= 2, big.pad_inner *= 2, big.pad_end *= 2;
        for (int32_t fidelity = 1; fidelity <= 2; fidelity++)
            assert_close(first_notch(twice.stackup, &big, fidelity), 0.5 * first_notch(board.stackup, &via, fidelity), 1e-11, 0, "identity: scale");
    }
    lstub_stackup_destroy(twice.stackup);
}
END_TEST

START_TEST(turned_over)
{
    test_board over = board;
    for (size_t i = 0; i < board.count; i++)
        over.layer[i] = board.layer[board.count - 1 - i];
    assert_ok(board_create(&over, NULL, &err), err);
    for (uint64_t i = 0; i < 50; i++) {
        int32_t connects[2], turned[2];
        lstub_via via = random_via(3, i, connects), other = via;
        turned[0] = 14 - connects[1];
        turned[1] = 14 - connects[0];
        other.connects = turned;
        assert_close(first_notch(over.stackup, &other, LSTUB_FIDELITY_LOADED), first_notch(board.stackup, &via, LSTUB_FIDELITY_LOADED), 1e-10, 0,
                     "identity: turned over");
        if (i >= 4)
            continue;
        lstub_model *up = model_on(board.stackup, &via, 0), *down = model_on(over.stackup, &other, 0);
        for (int32_t s = 0, n = lstub_model_stub_count(up); s < n; s++) {
            complex_value a = zin_of(up, s, 17e9), b = zin_of(down, n - 1 - s, 17e9);
            assert_close(a.re, b.re, 1e-12, 0, "identity: turned over");
            assert_close(a.im, b.im, 1e-12, 0, "identity: turned over");
        }
        lstub_model_destroy(up);
        lstub_model_destroy(down);
    }
    lstub_stackup_destroy(over.stackup);
}
END_TEST

START_TEST(longer_stub_lower_notch)
{
    for (int32_t fidelity = 1; fidelity <= 4; fidelity++) {
        double before = 0, f;
        for (int exit = 1; exit < 7; exit++) {
            int32_t connects[2] = {0, copper(exit)};
            lstub_via via = board_via(connects, 2);
            f = first_notch(board.stackup, &via, fidelity);
            ck_assert_msg(f > before, "fidelity %d, exit C%d: %g after %g", (int)fidelity, exit, f, before);
            before = f;
        }
        before = 0;
        for (int i = 0; i < 60; i += fidelity > 2 ? 12 : 1) {           /* drilled further and further */
            lstub_backdrill drill = {LSTUB_SIDE_BOTTOM, 0, 1e-6 + 20e-6 * i, 0.4e-3};
            lstub_via via = board_via(to_c1, 2);
            via.backdrills = &drill;
            via.backdrill_count = 1;
            f = first_notch(board.stackup, &via, fidelity);
            ck_assert_msg(f > before, "fidelity %d, drilled %g m: %g after %g", (int)fidelity, drill.depth, f, before);
            before = f;
        }
    }
}
END_TEST

/* Directions that every practitioner knows (common practice, no source). */
START_TEST(what_moves_the_notch)
{
    lstub_via plain = board_via(to_c1, 2), via;
    double f = first_notch(board.stackup, &plain, 0);
    ck_assert(f < first_notch(board.stackup, &plain, LSTUB_FIDELITY_BULK));
    via = plain, via.antipad = 0.9e-3;
    ck_assert_msg(first_notch(board.stackup, &via, 0) > f, "wider antipads");
    via = plain, via.nonfunctional_pads = LSTUB_PADS_KEPT;
    ck_assert_msg(first_notch(board.stackup, &via, 0) < f, "pads kept");
    via = plain, via.pad_end = 0.7e-3;
    ck_assert_msg(first_notch(board.stackup, &via, 0) < f, "a larger end pad");
    via = plain, via.return_count = 8;
    ck_assert_msg(first_notch(board.stackup, &via, 0) > f, "more return vias");
    via = plain, via.return_distance = 1.5e-3;
    ck_assert_msg(first_notch(board.stackup, &via, 0) < f, "return vias further away");
    via = plain, via.return_kind = LSTUB_RETURN_NONE;
    ck_assert_msg(first_notch(board.stackup, &via, 0) < f, "no return via");
    board.dielectric.in_plane_ratio = 1.2;
    teardown();
    assert_ok(board_create(&board, NULL, &err), err);
    ck_assert_msg(first_notch(board.stackup, &plain, 0) < f, "in-plane Dk");
}
END_TEST

START_TEST(no_return_via_radiates)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_notch ring, none;
    lstub_model *model = model_on(board.stackup, &via, 0);
    ck_assert_uint_ge(notches_of(model, 0, 60e9, &ring, 1), 1);
    lstub_model_destroy(model);
    via.return_kind = LSTUB_RETURN_NONE;
    model = model_on(board.stackup, &via, 0);
    ck_assert_uint_ge(notches_of(model, 0, 60e9, &none, 1), 1);
    ck_assert_msg(none.depth_db > -12 && none.depth_db < -3, "depth %g dB: a radiating barrel makes a shallow notch", none.depth_db);
    ck_assert(ring.depth_db < -25);
    lstub_model_destroy(model);
}
END_TEST

START_TEST(no_stub_loads_nothing)
{
    lstub_via via = board_via(through, 2);
    lstub_model *model = model_on(board.stackup, &via, 0);
    lstub_stub_line line;
    double f[2] = {1e9, 5e10}, s21[4], loss[2], zin[4];
    size_t count = 9;
    poison(line);
    ck_assert_int_eq(lstub_model_stub_count(model), 0);
    assert_ok(lstub_model_s21(model, LSTUB_ALL_STUBS, f, 2, s21, NULL, &err), err);
    assert_ok(lstub_model_added_loss(model, LSTUB_ALL_STUBS, f, 2, loss, NULL, &err), err);
    for (int i = 0; i < 2; i++)
        ck_assert(s21[2 * i] == 1 && s21[2 * i + 1] == 0 && loss[i] == 0);
    assert_ok(lstub_model_notches(model, LSTUB_ALL_STUBS, 1e12, NULL, 0, 0, &count, &err), err);
    ck_assert_uint_eq(count, 0);
    assert_refused(lstub_model_zin(model, LSTUB_ALL_STUBS, f, 2, zin, NULL, &err), LSTUB_E_NONE, err, "stub");
    assert_refused(lstub_model_line(model, 0, &line, &err), LSTUB_E_NONE, err, "stub = 0");
    assert_untouched(line);
    ck_assert(isnan(first_notch(board.stackup, &via, 0)));
    lstub_model_destroy(model);
}
END_TEST

START_TEST(vanishing_stub_does_nothing)
{
    lstub_backdrill drill = {LSTUB_SIDE_BOTTOM, 0, 0, 0.4e-3};
    lstub_via via = board_via(to_c1, 2);
    double full = 6 * 235e-6, left;
    via.backdrills = &drill;
    via.backdrill_count = 1;
    for (int32_t fidelity = 1; fidelity <= 2; fidelity++) {
        double loss = INFINITY, before, ce = 0;
        for (left = 100e-6; left > 1e-9; left *= 0.3) {
            drill.depth = full - left;
            before = loss;
            lstub_model *model = model_on(board.stackup, &via, fidelity);
            loss = loss_of(model, LSTUB_ALL_STUBS, 30e9);
            ce = line_of(model, 0).end_capacitance;
            ck_assert_msg(loss < before, "%g m left: %g dB", left, loss);
            lstub_model_destroy(model);
        }
        assert_close(loss, 10 * log10(1 + pow(PI * 30e9 * ce * 50, 2)), 0, 1e-6, "limit: nothing but the open end itself");
        ck_assert_msg(loss < 0.01, "%g dB of nothing", loss);
    }
}
END_TEST

/* ---- input --------------------------------------------------------------------------------------- */

START_TEST(frequencies_one_by_one)
{
    static const double f[] = {1e9, NAN, 2e9, 0, -1e9, INFINITY, 9e5, 2.1e11, 3e9, 1.5e11};
    static const int bad[] = {0, 1, 0, 1, 1, 1, 1, 1, 0, 0};
    enum { N = 10 };
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = model_on(board.stackup, &via, 0);
    double zin[2 * N], s21[2 * N], loss[N], alone[2];
    int32_t status[N];
    assert_refused(lstub_model_zin(model, 0, f, N, zin, status, &err), LSTUB_E_ARGUMENT, err, "item 1|freq = nan");
    ck_assert_int_eq(err.index, 1);
    assert_refused(lstub_model_s21(model, 0, f, N, s21, NULL, &err), LSTUB_E_ARGUMENT, err, "item 1|freq");
    assert_refused(lstub_model_added_loss(model, 0, f, N, loss, status, &err), LSTUB_E_ARGUMENT, err, "item 1|freq");
    for (int i = 0; i < N; i++) {
        ck_assert_int_eq(status[i], bad[i] ? LSTUB_E_ARGUMENT : i == N - 1 ? LSTUB_W_RANGE : LSTUB_OK);
        ck_assert_int_eq(isnan(zin[2 * i]) && isnan(zin[2 * i + 1]), bad[i]);
        ck_assert_int_eq(isnan(s21[2 * i]) && isnan(s21[2 * i + 1]), bad[i]);
        ck_assert_int_eq(isnan(loss[i]), bad[i]);
        if (!bad[i]) {
            ck_assert_int_ge(lstub_model_zin(model, 0, &f[i], 1, alone, NULL, &err), 0);
            ck_assert(alone[0] == zin[2 * i] && alone[1] == zin[2 * i + 1]);
        }
    }
    assert_ok(lstub_model_zin(model, 0, NULL, 0, NULL, NULL, &err), err);
    lstub_model_destroy(model);
}
END_TEST

START_TEST(range_is_told)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    double top = line_of(model, 0).f_range, f[3], loss[3];
    int32_t status[3];
    /* The antipad's radius is 0.375 mm; the largest region, from the outer face of C0 to C3, is 0.705 mm high. */
    assert_close(top, C0 / sqrt(3.6) / 10 / 0.705e-3, 1e-3, 0, "the header: the largest plate spacing, by hand");
    f[0] = 0.999 * top, f[1] = 1.001 * top, f[2] = 1e9;
    LSTUB_INIT(err);
    ck_assert_int_eq(lstub_model_added_loss(model, 0, f, 3, loss, status, &err), LSTUB_W_RANGE);
    ck_assert(status[0] == LSTUB_OK && status[1] == LSTUB_W_RANGE && status[2] == LSTUB_OK);
    ck_assert(isfinite(loss[1]));
    ck_assert_int_eq(err.status, LSTUB_W_RANGE);
    ck_assert_str_ne(err.message, "");
    lstub_model_destroy(model);
    model = model_on(board.stackup, &via, 0);
    assert_close(line_of(model, 0).f_range, 110e9, 0, 0, "the header");
    lstub_model_destroy(model);
}
END_TEST

START_TEST(bad_calls)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = model_on(board.stackup, &via, 0), *none = NULL;
    lstub_model_options o = options(0);
    lstub_stub stub;
    lstub_stub_line line;
    lstub_notch notch;
    double f = 1e9, out[2];
    size_t count = 77;
    poison(stub);
    poison(line);
    poison(notch);
    memset(out, POISON, sizeof out);
    assert_refused(lstub_model_create(NULL, &via, NULL, NULL, &none, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_model_create(board.stackup, NULL, NULL, NULL, &none, &err), LSTUB_E_NULL, err, "via|null");
    assert_refused(lstub_model_create(board.stackup, &via, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "out|null");
    o.fidelity = 9;
    assert_refused(lstub_model_create(board.stackup, &via, &o, NULL, &none, &err), LSTUB_E_ARGUMENT, err, "fidelity = 9");
    o.fidelity = -1;
    assert_refused(lstub_model_create(board.stackup, &via, &o, NULL, &none, &err), LSTUB_E_ARGUMENT, err, "fidelity = -1");
    o.fidelity = 0;
    o.reserved = 3;
    assert_refused(lstub_model_create(board.stackup, &via, &o, NULL, &none, &err), LSTUB_E_SIZE, err, "reserved = 3");
    o.reserved = 0;
    static const double bad_z[] = {-50, NAN, INFINITY, 1e9};
    for (size_t i = 0; i < COUNT(bad_z); i++) {
        o.z_ref = bad_z[i];
        assert_refused(lstub_model_create(board.stackup, &via, &o, NULL, &none, &err), LSTUB_E_ARGUMENT, err, "z_ref|ohm");
    }
    o.size = 5;
    assert_refused(lstub_model_create(board.stackup, &via, &o, NULL, &none, &err), LSTUB_E_SIZE, err, "options|size = 5");
    via.antipad = 0.2e-3;
    assert_refused(lstub_model_create(board.stackup, &via, NULL, NULL, &none, &err), LSTUB_E_GEOMETRY, err, "layer 6 'C3'|antipad = 0.0002 m|drill");
    ck_assert_ptr_null(none);
    ck_assert_int_eq(lstub_model_stub_count(NULL), 0);
    assert_refused(lstub_model_stub(model, 1, &stub, &err), LSTUB_E_ARGUMENT, err, "stub = 1");
    assert_refused(lstub_model_stub(model, LSTUB_ALL_STUBS, &stub, &err), LSTUB_E_ARGUMENT, err, "stub = -1");
    assert_refused(lstub_model_stub(NULL, 0, &stub, &err), LSTUB_E_NULL, err, "model|null");
    assert_refused(lstub_model_stub(model, 0, NULL, &err), LSTUB_E_NULL, err, "null");
    assert_refused(lstub_model_line(model, 2, &line, &err), LSTUB_E_ARGUMENT, err, "stub = 2");
    assert_refused(lstub_model_line(NULL, 0, &line, &err), LSTUB_E_NULL, err, "model|null");
    assert_refused(lstub_model_zin(model, 5, &f, 1, out, NULL, &err), LSTUB_E_ARGUMENT, err, "stub = 5");
    assert_refused(lstub_model_zin(NULL, 0, &f, 1, out, NULL, &err), LSTUB_E_NULL, err, "model|null");
    assert_refused(lstub_model_zin(model, 0, NULL, 1, out, NULL, &err), LSTUB_E_NULL, err, "freq|null");
    assert_refused(lstub_model_zin(model, 0, &f, 1, NULL, NULL, &err), LSTUB_E_NULL, err, "null");
    assert_refused(lstub_model_notches(NULL, 0, 1e11, &notch, 1, sizeof notch, &count, &err), LSTUB_E_NULL, err, "model|null");
    assert_refused(lstub_model_notches(model, 0, 1e11, &notch, 1, sizeof notch, NULL, &err), LSTUB_E_NULL, err, "count|null");
    assert_refused(lstub_model_notches(model, 0, 1e11, NULL, 1, sizeof notch, &count, &err), LSTUB_E_NULL, err, "notches|null");
    assert_refused(lstub_model_notches(model, 0, 1e11, &notch, 1, 8, &count, &err), LSTUB_E_SIZE, err, "notches|stride = 8");
    assert_refused(lstub_model_notches(model, 4, 1e11, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "stub = 4");
    assert_refused(lstub_model_notches(model, 0, NAN, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "f_max = nan");
    assert_refused(lstub_model_notches(model, 0, 2e12, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "f_max|Hz");
    assert_untouched(stub);
    assert_untouched(line);
    assert_untouched(notch);
    ck_assert_uint_eq(count, 77);
    ck_assert(poisoned(out, sizeof out));
    lstub_model_destroy(model);
    lstub_model_destroy(NULL);
}
END_TEST

START_TEST(nothing_to_compute_a_capacitance_from)
{
    test_board bare;
    int32_t connects[] = {0, 2};
    lstub_via via = board_via(connects, 2);
    lstub_model *model = NULL;
    board_make(&bare, "SSSS", 0.2e-3, 35e-6);
    assert_refused(lstub_model_create(bare.stackup, &via, NULL, NULL, &model, &err), LSTUB_E_UNSUPPORTED, err, "antipad|plane");
    ck_assert_ptr_null(model);
    lstub_stackup_destroy(bare.stackup);
}
END_TEST

START_TEST(every_allocation_fails_once)
{
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    lstub_via via = board_via(inner, 2);
    lstub_model *model = NULL;
    for (long n = 1;; n++) {
        LSTUB_INIT(err);
        memory.calls = 0;
        memory.fail_at = n;
        if (lstub_model_create(board.stackup, &via, NULL, &allocator, &model, &err) == LSTUB_OK) {
            ck_assert_int_gt(n, 1);
            break;
        }
        ck_assert_int_eq(err.status, LSTUB_E_MEMORY);
        ck_assert_ptr_null(model);
        ck_assert_int_eq(memory.live, 0);
    }
    teardown();                              /* the model needs neither the stackup nor the via */
    memset(&via, POISON, sizeof via);
    ck_assert(loss_of(model, LSTUB_ALL_STUBS, 20e9) > 0);
    memory.calls = 0;                        /* and answers without memory of its own */
    lstub_notch notches[8];
    notches_of(model, LSTUB_ALL_STUBS, 100e9, notches, 8);
    ck_assert_int_eq(memory.calls, 0);
    lstub_model_destroy(model);
    ck_assert_int_eq(memory.live, 0);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("model");
    TCase *exact = tcase_create("lossless"), *truth = tcase_create("lossy"), *input = tcase_create("input");
    tcase_add_checked_fixture(exact, setup_lossless, teardown);
    tcase_add_checked_fixture(truth, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_set_timeout(truth, 120);
    tcase_add_test(exact, bulk_is_the_quarter_wave);
    tcase_add_test(exact, bulk_skirt_is_that_of_the_formula);
    tcase_add_test(exact, bulk_floor_and_q_are_those_of_a_lossy_line);
    tcase_add_test(exact, loaded_line_in_another_form);
    tcase_add_test(exact, inductance_of_walls_and_pairs);
    tcase_add_test(exact, dense_planes_are_a_coaxial_line);
    tcase_add_test(exact, capacitance_by_hand);
    tcase_add_test(exact, end_capacitance_by_hand);
    tcase_add_test(exact, scale);
    tcase_add_test(exact, vanishing_stub_does_nothing);
    tcase_add_test(truth, one_line_in_four_functions);
    tcase_add_test(truth, turned_over);
    tcase_add_test(truth, longer_stub_lower_notch);
    tcase_add_test(truth, what_moves_the_notch);
    tcase_add_test(truth, no_return_via_radiates);
    tcase_add_test(truth, no_stub_loads_nothing);
    tcase_add_test(input, frequencies_one_by_one);
    tcase_add_test(input, range_is_told);
    tcase_add_test(input, bad_calls);
    tcase_add_test(input, nothing_to_compute_a_capacitance_from);
    tcase_add_test(input, every_allocation_fails_once);
    suite_add_tcase(suite, exact);
    suite_add_tcase(suite, truth);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
