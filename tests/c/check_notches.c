/* Notches: none missed, none invented, and those of many vias at once. */
#include "check_model.h"

/* ---- notches: none missed, none invented --------------------------------------------------------- */

typedef struct minimum {
    double f, db;
} minimum;

/* Local maxima of the added loss of one stub, seen by stepping through the band. */
static size_t scan(const lstub_model *model, int32_t stub, double f_max, minimum *found, size_t capacity)
{
    enum { STEPS = 40000 };
    static double f[STEPS], loss[STEPS];
    size_t count = 0;
    for (int i = 0; i < STEPS; i++)
        f[i] = 1e9 + (f_max - 1e9) * i / (STEPS - 1);
    ck_assert_int_ge(lstub_model_added_loss(model, stub, f, STEPS, loss, NULL, &err), 0);
    for (int i = 1; i + 1 < STEPS; i++)
        if (loss[i] > loss[i - 1] && loss[i] >= loss[i + 1]) {
            ck_assert_uint_lt(count, capacity);
            found[count].f = f[i];
            found[count++].db = -loss[i];
        }
    return count;
}

static void compare_with_scan(const lstub_model *model, double f_max)
{
    lstub_notch notches[64];
    minimum minima[64];
    for (int32_t stub = 0; stub < lstub_model_stub_count(model); stub++) {
        size_t n = notches_of(model, stub, f_max, notches, COUNT(notches)), m = scan(model, stub, f_max, minima, COUNT(minima));
        double step = f_max / 40000;
        if (n == m + 1 && notches[n - 1].f > f_max - 2 * step)
            n = m;                               /* at the very end of the band: the scan cannot see it */
        ck_assert_msg(n == m, "stub of %g m: %zu notches, %zu minima of |S21|; first at %g, %g Hz, %g dB", length_of(model, stub), n, m,
                      n ? notches[0].f : 0, m ? minima[0].f : 0, m ? minima[0].db : 0);
        for (size_t i = 0; i < n; i++) {
            assert_close(notches[i].f, minima[i].f, 0, 2 * step, "a scan of |S21| in 40000 steps");
            ck_assert(notches[i].depth_db <= minima[i].db + 1e-6);
            ck_assert(i == 0 || notches[i].f > notches[i - 1].f);
        }
    }
}

static const double loss_tangents[] = {0.001, 0.004, 0.02, 0.05, 0.1, 0.2};   /* above, Re eps of the model falls below 1 */

START_TEST(notches_are_the_minima_of_s21)
{
    teardown();
    setup_loss(loss_tangents[_i]);
    for (uint64_t i = 0; i < 40; i++) {
        int32_t connects[2];
        lstub_via via = random_via(4, i, connects);
        if (via.return_kind == LSTUB_RETURN_NONE)
            via.return_kind = LSTUB_RETURN_WALL;
        lstub_model *model = model_on(board.stackup, &via, 1 + (int32_t)(i % 2));
        compare_with_scan(model, 250e9);
        lstub_model_destroy(model);
    }
}
END_TEST

/* Without a return via the first notch must be there within the stated range. */
START_TEST(notches_of_radiating_barrels)
{
    for (uint64_t i = 0; i < 60; i++) {
        int32_t connects[2];
        lstub_via via = random_via(5, i, connects);
        via.return_kind = LSTUB_RETURN_NONE;
        lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
        for (int32_t stub = 0; stub < lstub_model_stub_count(model); stub++) {
            lstub_notch notch;
            minimum minima[64];
            double range = line_of(model, stub).f_range;
            size_t n = notches_of(model, stub, range, &notch, 1), m = scan(model, stub, range, minima, COUNT(minima));
            if (m > 0) {
                ck_assert_msg(n > 0, "no notch, but |S21| has a minimum at %g", minima[0].f);
                assert_close(notch.f, minima[0].f, 0, range / 20000, "a scan of |S21|");
            }
        }
        lstub_model_destroy(model);
    }
}
END_TEST

/* At the very notch of a loss-free stub its admittance is infinite: a short, not a hole in the answers. */
START_TEST(exact_notch_of_a_lossless_stub)
{
    teardown();
    setup_loss(0.0);
    for (uint64_t i = 0; i < 60; i++) {
        int32_t connects[2];
        lstub_via via = random_via(7, i, connects);
        if (via.return_kind == LSTUB_RETURN_NONE)
            continue;
        lstub_model *model = model_on(board.stackup, &via, 1 + (int32_t)(i % 2));
        lstub_notch notches[32];
        size_t n = notches_of(model, LSTUB_ALL_STUBS, 300e9, notches, COUNT(notches));
        for (size_t k = 0; k < n && k < COUNT(notches); k++)
            for (int step = -1; step <= 1; step++) {
                double f = notches[k].f * (1 + step * 2.3e-16), s21[2], loss = loss_of(model, notches[k].stub, f);
                complex_value z = zin_of(model, notches[k].stub, f);
                ck_assert_int_ge(lstub_model_s21(model, LSTUB_ALL_STUBS, &f, 1, s21, NULL, &err), 0);
                ck_assert_msg(hypot(s21[0], s21[1]) < 1e-6, "S21 at the notch: %g %g", s21[0], s21[1]);
                ck_assert_msg(hypot(z.re, z.im) < 1e-4, "Zin at the notch: %g %g ohm", z.re, z.im);
                ck_assert_msg(loss > 120 && loss <= 400, "loss at the notch: %g dB", loss);
            }
        lstub_model_destroy(model);
    }
}
END_TEST

/* Loss-free below the exit, lossy above it: what the field around the exit meets decides. */
START_TEST(loss_on_the_other_side_of_the_exit)
{
    lstub_dielectric lossy = board.dielectric, free = board.dielectric;
    int32_t connects[] = {0, 4};                 /* exit on C2, a signal layer: one region from C1 to C3 */
    lstub_via via = board_via(connects, 2);
    teardown();
    lossy.loss_tangent = 0.1;
    free.loss_tangent = 0.0;
    for (size_t i = 1; i < board.count; i += 2)
        board.layer[i].dielectric = i < 5 ? &lossy : &free;
    assert_ok(board_create(&board, NULL, &err), err);
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    lstub_notch notch;
    ck_assert_uint_ge(notches_of(model, 0, 200e9, &notch, 1), 1);
    assert_close(notch.depth_db, -loss_of(model, 0, notch.f), 0, 0.01, "identity: depth is |S21| at the notch");
    compare_with_scan(model, 200e9);
    lstub_model_destroy(model);
}
END_TEST

START_TEST(two_stubs_and_all)
{
    lstub_via via = board_via(inner, 2);
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    lstub_notch one[32], two[32], all[64];
    ck_assert_int_eq(lstub_model_stub_count(model), 2);
    size_t n = notches_of(model, 0, 300e9, one, 32), m = notches_of(model, 1, 300e9, two, 32);
    size_t count = notches_of(model, LSTUB_ALL_STUBS, 300e9, all, 64), i = 0, j = 0;
    ck_assert_uint_eq(count, n + m);
    for (size_t k = 0; k < count; k++) {
        ck_assert(k == 0 || all[k].f >= all[k - 1].f);
        ck_assert_int_eq(all[k].stub, i < n && (j == m || one[i].f <= two[j].f) ? 0 : 1);
        assert_close(all[k].f, all[k].stub == 0 ? one[i].f : two[j].f, 1e-6, 0, "identity: the stub's own notch");
        i += all[k].stub == 0;
        j += all[k].stub == 1;
    }
    lstub_model_destroy(model);
}
END_TEST

START_TEST(more_notches_than_room)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LOADED);
    lstub_notch all[32], some[3];
    size_t count = 0, n = notches_of(model, 0, 300e9, all, 32);
    ck_assert_uint_gt(n, 2);
    LSTUB_INIT(some[0]);
    LSTUB_INIT(some[1]);
    poison(some[2]);
    ck_assert_int_eq(lstub_model_notches(model, 0, 300e9, some, 2, sizeof some[0], &count, &err), LSTUB_W_CAPACITY);
    ck_assert_uint_eq(count, n);
    ck_assert(some[0].f == all[0].f && some[1].f == all[1].f);
    assert_untouched(some[2]);
    ck_assert_int_eq(lstub_model_notches(model, 0, 300e9, NULL, 0, 0, &count, &err), LSTUB_W_CAPACITY);
    ck_assert_uint_eq(count, n);
    assert_ok(lstub_model_notches(model, 0, 1e6, NULL, 0, 0, &count, &err), err);
    ck_assert_uint_eq(count, 0);
    lstub_model_destroy(model);
}
END_TEST

/* ---- batch --------------------------------------------------------------------------------------- */

enum { BATCH = 40 };

static void make_batch(lstub_via *vias, int32_t connects[BATCH][2])
{
    for (uint64_t i = 0; i < BATCH; i++)
        vias[i] = random_via(6, i, connects[i]);
    vias[7].drill = -1;
    vias[19].antipad = NAN;
}

START_TEST(batch_is_its_parts)
{
    lstub_via vias[BATCH];
    int32_t connects[BATCH][2], status[BATCH], part_status[BATCH];
    double all[3][BATCH], part[3][BATCH];
    make_batch(vias, connects);
    assert_refused(lstub_first_notch_batch(board.stackup, vias, BATCH, sizeof vias[0], LOADED, all[0], all[1], all[2], status, &err),
                   LSTUB_E_ARGUMENT, err, "item 7|drill = -1 m");
    ck_assert_int_eq(err.index, 7);
    for (size_t at = 0; at < BATCH;) {
        size_t n = 1 + at % 7 < BATCH - at ? 1 + at % 7 : BATCH - at;
        lstub_first_notch_batch(board.stackup, vias + at, n, sizeof vias[0], LOADED, part[0] + at, part[1] + at, part[2] + at, part_status + at, NULL);
        at += n;
    }
    ck_assert_mem_eq(status, part_status, sizeof status);
    for (size_t i = 0; i < BATCH; i++) {
        for (int k = 0; k < 3; k++)
            ck_assert(all[k][i] == part[k][i] || (isnan(all[k][i]) && isnan(part[k][i])));
        ck_assert_int_eq(status[i] < 0, i == 7 || i == 19);
        if (status[i] < 0)
            ck_assert(isnan(all[0][i]) && isnan(all[1][i]) && isnan(all[2][i]));
    }
    lstub_first_notch_batch(board.stackup, vias, BATCH, sizeof vias[0], LOADED, NULL, part[1], NULL, NULL, NULL);
    ck_assert(part[1][3] == all[1][3] || isnan(all[1][3]));
}
END_TEST

START_TEST(batch_against_models)
{
    lstub_via vias[BATCH];
    int32_t connects[BATCH][2];
    double f1[BATCH], dk[BATCH], length[BATCH];
    make_batch(vias, connects);
    lstub_first_notch_batch(board.stackup, vias, BATCH, sizeof vias[0], LOADED, f1, dk, length, NULL, NULL);
    for (size_t i = 0; i < BATCH; i++) {
        if (i == 7 || i == 19)
            continue;
        lstub_model *model = model_on(board.stackup, &vias[i], LSTUB_FIDELITY_LOADED);
        lstub_notch n;
        if (notches_of(model, LSTUB_ALL_STUBS, 1e12, NULL, 0) == 0 || isnan(f1[i])) {
            ck_assert(isnan(f1[i]) && isnan(dk[i]) && isnan(length[i]));
        } else {
            LSTUB_INIT(n);
            size_t count;
            lstub_model_notches(model, LSTUB_ALL_STUBS, 1e12, &n, 1, sizeof n, &count, NULL);
            assert_close(n.f, f1[i], 0, 0, "identity: the batch is the model");
            assert_close(length[i], length_of(model, n.stub), 1e-14, 0, "identity: the batch is the model");
            assert_close(dk[i], line_of(model, n.stub).dk_effective, 1e-14, 0, "identity: the batch is the model");
        }
        lstub_model_destroy(model);
    }
}
END_TEST

START_TEST(batch_failures)
{
    lstub_via vias[3];
    int32_t connects[3][2], status[3] = {5, 5, 5};
    double f1[3];
    for (uint64_t i = 0; i < 3; i++)
        vias[i] = random_via(6, i, connects[i]);
    vias[0].drill = NAN;
    vias[2].antipad = vias[2].drill;
    LSTUB_INIT(err);
    ck_assert_int_eq(lstub_first_notch_batch(board.stackup, vias, 3, sizeof vias[0], NULL, f1, NULL, NULL, status, &err), LSTUB_E_MIXED);
    ck_assert_ptr_nonnull(strstr(err.message, "item 0: drill = nan"));       /* the first item's own story */
    ck_assert(err.status == LSTUB_E_ARGUMENT && err.index == 0);
    ck_assert(status[0] == LSTUB_E_ARGUMENT && status[1] >= 0 && status[2] == LSTUB_E_GEOMETRY);
    assert_ok(lstub_first_notch_batch(board.stackup, NULL, 0, 0, NULL, NULL, NULL, NULL, NULL, &err), err);
    assert_refused(lstub_first_notch_batch(board.stackup, NULL, 2, sizeof vias[0], NULL, f1, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "vias|null");
    assert_refused(lstub_first_notch_batch(NULL, vias, 2, sizeof vias[0], NULL, f1, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_first_notch_batch(board.stackup, vias, 2, 16, NULL, f1, NULL, NULL, NULL, &err), LSTUB_E_SIZE, err, "vias|stride = 16");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("notches");
    TCase *found = tcase_create("notches"), *batches = tcase_create("batch");
    tcase_add_checked_fixture(found, setup, teardown);
    tcase_add_checked_fixture(batches, setup, teardown);
    tcase_set_timeout(found, 120);
    tcase_add_loop_test(found, notches_are_the_minima_of_s21, 0, (int)COUNT(loss_tangents));
    tcase_add_test(found, notches_of_radiating_barrels);
    tcase_add_test(found, exact_notch_of_a_lossless_stub);
    tcase_add_test(found, loss_on_the_other_side_of_the_exit);
    tcase_add_test(found, two_stubs_and_all);
    tcase_add_test(found, more_notches_than_room);
    tcase_add_test(batches, batch_is_its_parts);
    tcase_add_test(batches, batch_against_models);
    tcase_add_test(batches, batch_failures);
    suite_add_tcase(suite, found);
    suite_add_tcase(suite, batches);
    return test_main(suite);
}
