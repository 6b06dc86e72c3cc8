/* Notches in measurements: those that are there, with their errors, and none that are not. */
#include "check_measure.h"

#define NOTCHES 8

static measured bench;
static double stub_s21[2 * SAMPLES_MOST], averaged[SAMPLES_MOST], trend[SAMPLES_MOST];
static lstub_measured_notch found[NOTCHES];

/* Notches of a measurement; options may be null. */
static size_t notches_in(const measured *m, const lstub_search *options)
{
    size_t count = 99;
    for (size_t i = 0; i < NOTCHES; i++)
        LSTUB_INIT(found[i]);
    LSTUB_INIT(err);
    assert_ok(lstub_find_notches(m->f, m->n, m->s, 16, options, found, NOTCHES, sizeof found[0], &count, averaged, trend, &err), err);
    for (size_t i = 0; i < count; i++) {
        const lstub_measured_notch *g = &found[i];
        ck_assert(g->f > m->f[0] && g->f < m->f[m->n - 1] && g->f_sigma > 0.0 && g->f_sigma < g->f);
        ck_assert(g->depth_db < -1.0 && g->width > 0.0 && g->score > 4.0 && g->impedance > 0.0);
        ck_assert(i == 0 || g->f > found[i - 1].f);
        ck_assert_int_eq(!!(g->quality & LSTUB_QUALITY_SHALLOW), g->depth_db > -6.0);
        ck_assert_int_eq(!!(g->quality & LSTUB_QUALITY_RIPPLE), g->score < 8.0);
    }
    return count;
}

/* ---- real channels ------------------------------------------------------------------------------- */

static void load(const char *name, measured *m)
{
    char path[512], line[128];
    snprintf(path, sizeof path, "%s/channels/%s", LSTUB_TEST_DATA, name);
    FILE *file = fopen(path, "r");
    ck_assert_msg(file != NULL && fgets(line, sizeof line, file) != NULL, "%s is not there", path);
    for (m->n = 0; fgets(line, sizeof line, file) != NULL; m->n++) {
        ck_assert_uint_lt(m->n, SAMPLES_MOST);
        ck_assert_int_eq(sscanf(line, "%lf,%lf,%lf", &m->f[m->n], &m->s[2 * m->n], &m->s[2 * m->n + 1]), 3);
    }
    fclose(file);
    ck_assert_uint_eq(m->n, 1496);
}

START_TEST(backplane_with_long_stubs)
{
    lstub_search o;
    LSTUB_INIT(o);
    load("backplane_long_stub_sdd21.csv", &bench);
    o.window = 0.5e9;
    ck_assert_uint_eq(notches_in(&bench, &o), 1);
    assert_close(found[0].f_minimum, 7.16e9, 0, 0.0101e9, "the channels' README; one step, as its average is of whole samples");
    assert_close(found[0].level_db, -49.4, 0, 0.05, "the channels' README");
    assert_close(found[0].f, 7.16e9, 0, 2.0 * found[0].f_sigma, "the same, with the slope of the channel in it");
    ck_assert(found[0].f_sigma < 0.2e9 && found[0].depth_db < -15.0);
    ck_assert_int_eq(found[0].quality, LSTUB_QUALITY_GOOD);
    double f = found[0].f, sigma = found[0].f_sigma;
    for (size_t i = 0; i < bench.n; i++)
        if (bench.f[i] == 10e9)
            assert_close(averaged[i], -39.5, 0, 0.1, "the channels' README");
    ck_assert_uint_eq(notches_in(&bench, NULL), 1);
    assert_close(found[0].f, f, 0, sigma, "the window chosen from the data finds the same");
    o.f_high = 12e9;
    o.window = 0.25e9;
    ck_assert_uint_eq(notches_in(&bench, &o), 1);
    assert_close(found[0].f, f, 0, 2.0 * sigma, "less of the band finds the same");
    o.f_high = 6.5e9;                        /* the notch outside */
    ck_assert_uint_eq(notches_in(&bench, &o), 0);
}
END_TEST

START_TEST(backplane_with_short_stubs)
{
    static const double windows[] = {0.0, 0.05e9, 0.1e9, 0.25e9, 0.5e9, 1e9};
    load("backplane_control_sdd21.csv", &bench);
    for (size_t i = 0; i < COUNT(windows); i++) {
        lstub_search o;
        LSTUB_INIT(o);
        o.window = windows[i];
        ck_assert_msg(notches_in(&bench, &o) == 0, "window %g Hz: a notch at %g Hz, %g dB", windows[i], found[0].f, found[0].depth_db);
    }
}
END_TEST

/* ---- made channels ------------------------------------------------------------------------------- */

typedef struct truth {
    lstub_notch notch;
    lstub_model *model;
} truth;

/* A via drawn on a board drawn, and its first notch; 0 where it has none to 100 GHz. */
static int draw(uint64_t seed, uint64_t i, truth *t)
{
    static const char *const kinds[] = {"SPSPSPPS", "SPPSPPSPPSPPS", "SPSPSPSPSPSPSPSPS", "SPPPPPPPPS"};
    const char *kind = kinds[i % COUNT(kinds)];
    int32_t connects[2];
    uint64_t k = 1000000 + 10 * i;
    teardown();
    board_layers(&board, kind, between(0.1e-3, 0.25e-3, seed, k), between(12e-6, 35e-6, seed, k + 1));
    board.dielectric.loss_tangent = decades(0.001, 0.02, seed, k + 2);
    board.dielectric.dk = between(3.0, 4.5, seed, k + 3);
    LSTUB_INIT(err);
    assert_ok(board_create(&board, NULL, &err), err);
    lstub_via via = random_via(seed, i, connects);
    connects[0] = copper(0);
    connects[1] = copper(1 + (int)(0.6 * ((double)strlen(kind) - 2.0) * test_random(seed, k + 4)));
    t->model = model_on(board.stackup, &via, LSTUB_FIDELITY_LADDER);
    if (notches_of(t->model, LSTUB_ALL_STUBS, 100e9, &t->notch, 1) > 0)
        return 1;
    lstub_model_destroy(t->model);
    return 0;
}

/* Of 200 vias: found within 2 sigma in 95 %, all that are 12 dB deep, most that are shallower, and nothing else. */
START_TEST(drawn_stubs)
{
    const uint64_t seed = 11;
    int drawn = 0, hits = 0, within = 0, deep = 0, deep_hits = 0, others = 0, sure_of_q = 0, q_right = 0;
    for (uint64_t i = 0; drawn < 200; i++) {
        truth t;
        if (!draw(seed, i, &t))
            continue;
        channel c = random_channel(seed, i, t.notch.f * between(1.25, 2.2, seed, 2000000 + i), &bench);
        ck_assert_int_ge(lstub_model_s21(t.model, LSTUB_ALL_STUBS, bench.f, bench.n, stub_s21, NULL, &err), 0);
        lstub_model_destroy(t.model);
        measure(&c, stub_s21, seed + i, &bench);
        size_t count = notches_in(&bench, NULL), best = 0;
        for (size_t k = 1; k < count; k++)
            if (fabs(found[k].f - t.notch.f) < fabs(found[best].f - t.notch.f))
                best = k;
        int hit = count > 0 && fabs(found[best].f / t.notch.f - 1.0) < 0.1;
        drawn++;
        hits += hit;
        others += (int)count - hit;
        within += hit && fabs(found[best].f - t.notch.f) <= 2.0 * found[best].f_sigma;
        deep += t.notch.depth_db < -12.0;
        deep_hits += hit && t.notch.depth_db < -12.0;
        if (hit && t.notch.depth_db < -12.0 && t.notch.depth_db > -35.0 && !isnan(found[best].q)) {
            sure_of_q++;
            q_right += fabs(found[best].q / t.notch.q - 1.0) < 0.25;
        }
    }
    ck_assert_msg(deep > 100 && deep_hits == deep, "%d of %d notches of 12 dB and more found", deep_hits, deep);
    ck_assert_msg(within >= 0.95 * hits, "%d of %d within 2 sigma", within, hits);
    ck_assert_msg(hits >= 0.85 * drawn, "%d of %d found: a third has no return near, and a notch of 6 dB", hits, drawn);
    ck_assert_msg(others <= 2, "%d notches that are none", others);
    ck_assert_msg(q_right >= 0.9 * sure_of_q, "%d of %d Q within a quarter", q_right, sure_of_q);
}
END_TEST

/* 200 channels without a stub: as above; roll-offs of 40 to 150 dB into the noise; launches that reflect twice as much between
** lines of other impedances. */
START_TEST(drawn_channels_without_stub)
{
    const uint64_t seed = 21 + (uint64_t)_i;
    int alarms = 0;
    for (uint64_t i = 0; i < 200; i++) {
        channel c = random_channel(seed, i, decades(8e9, 80e9, seed, 3000000 + i), &bench);
        if (_i == 1) {
            double part = test_random(seed, 4000000 + i), loss = between(40.0, 150.0, seed, 5000000 + i);
            c.loss_root = part * loss;
            c.loss_f = loss - c.loss_root;
        }
        for (uint64_t e = 0; _i == 2 && e < 2; e++) {
            c.launch[e] *= 2.0;
            c.line_z[e] = between(35.0, 70.0, seed, 6000000 + 2 * i + e);
        }
        measure(&c, NULL, seed + i, &bench);
        alarms += notches_in(&bench, NULL) > 0;
    }
    ck_assert_msg(alarms <= 2, "%d of 200 channels without a stub have a notch", alarms);
}
END_TEST

/* A stub of 4 mm on a line, all but alone: what is found is what the model says of itself. */
static lstub_notch alone(double loss, double top, int32_t *quality)
{
    int32_t connects[] = {0, 2};
    lstub_via via = board_via(connects, 2);
    lstub_notch notch;
    via.return_distance = 0.8e-3;
    lstub_model *model = model_on(board.stackup, &via, LSTUB_FIDELITY_LADDER);
    ck_assert_uint_ge(notches_of(model, LSTUB_ALL_STUBS, 100e9, &notch, 1), 1);
    channel c = {50.0, {0.0, 0.0}, {50.0, 50.0}, {0.2e-9, 0.3e-9}, 0.5 * loss, 0.5 * loss, notch.f, 1e-5};
    bench.n = 3001;
    for (size_t i = 0; i < bench.n; i++)
        bench.f[i] = notch.f * (0.01 + (top - 0.01) * (double)i / 3000.0);
    ck_assert_int_ge(lstub_model_s21(model, LSTUB_ALL_STUBS, bench.f, bench.n, stub_s21, NULL, &err), 0);
    lstub_model_destroy(model);
    measure(&c, stub_s21, 5, &bench);
    *quality = -1;
    if (notches_in(&bench, NULL) > 0)
        *quality = found[0].quality;
    return notch;
}

START_TEST(a_stub_alone)
{
    for (int k = 0; k < 2; k++) {
        int32_t quality;
        lstub_notch notch = alone(k * 15.0, 1.7, &quality);
        ck_assert_int_eq(quality, LSTUB_QUALITY_GOOD);
        assert_close(found[0].f, notch.f, 3e-4, 0, "lstub_model_notches");
        assert_close(found[0].depth_db, notch.depth_db, 0, 1.0, "lstub_model_notches; the trend is good to a dB");
        assert_close(found[0].q, notch.q, 0.05, 0, "lstub_model_notches");
        ck_assert(found[0].impedance > 0.3 && found[0].impedance < 2.0);
        ck_assert(found[0].f_minimum > 0.99 * notch.f && found[0].f_minimum < 1.01 * notch.f);
    }
}
END_TEST

START_TEST(the_end_of_the_band)
{
    int32_t quality;
    for (double top = 0.5; top < 0.995; top += 0.05) {
        alone(10.0, top, &quality);
        ck_assert_msg(quality == -1, "band ends at %g f1: a notch at %g Hz", top, found[0].f);
    }
    lstub_notch notch = alone(0.0, 1.02, &quality);
    ck_assert(quality > 0 && (quality & LSTUB_QUALITY_EDGE) != 0);
    assert_close(found[0].f, notch.f, 5e-3, 0, "lstub_model_notches");
    notch = alone(0.0, 1.6, &quality);
    ck_assert_int_eq(quality & LSTUB_QUALITY_EDGE, 0);
}
END_TEST

/* ---- the call ------------------------------------------------------------------------------------ */

START_TEST(elements_bands_windows)
{
    enum { P = 3 };
    static double all[2 * P * P * SAMPLES_MOST];
    int32_t quality;
    alone(10.0, 1.7, &quality);
    lstub_measured_notch same = found[0], one;
    size_t count = 0, n = bench.n;
    for (size_t i = 0; i < 2 * P * P * n; i++)
        all[i] = NAN;
    for (size_t i = 0; i < n; i++)
        memcpy(&all[2 * (P * P * i + P * 2 + 1)], &bench.s[2 * i], 16);        /* element (2, 1) */
    LSTUB_INIT(one);
    assert_ok(lstub_find_notches(bench.f, n, &all[2 * (P * 2 + 1)], 16 * P * P, NULL, &one, 1, sizeof one, &count, NULL, NULL, &err), err);
    ck_assert_uint_eq(count, 1);
    ck_assert(memcmp(&one, &same, sizeof one) == 0);

    lstub_search o;
    LSTUB_INIT(o);
    o.f_low = 0.2 * same.f;
    o.f_high = 1.5 * same.f;
    o.window = 0.05 * same.f;
    ck_assert_uint_eq(notches_in(&bench, &o), 1);
    assert_close(found[0].f, same.f, 1e-3, 0, "a window of 5 % does not move it");
    assert_close(found[0].q, same.q, 0.25, 0, "and is taken out of Q");
    ck_assert(found[0].window == o.window && found[0].depth_db > same.depth_db + 0.5);
    for (size_t i = 0; i < n; i++) {
        int in = bench.f[i] >= o.f_low && bench.f[i] <= o.f_high;
        ck_assert(isnan(averaged[i]) == !in && isnan(trend[i]) == !in);
    }
    o.depth_least = -same.depth_db + 3.0;
    ck_assert_uint_eq(notches_in(&bench, &o), 0);

    for (size_t i = 0; i < 2 * n; i++)       /* three times as loud, turned: no other notch */
        bench.s[i] *= i % 2 ? -3.0 : 3.0;
    ck_assert_uint_eq(notches_in(&bench, NULL), 1);
    assert_close(found[0].f, same.f, 1e-9, 0, "a factor is part of the trend");
    assert_close(found[0].level_db, same.level_db + 20.0 * log10(3.0), 1e-9, 0, "dB");
}
END_TEST

START_TEST(more_than_there_is_room)
{
    int32_t quality;
    size_t count = 0;
    alone(0.0, 4.0, &quality);
    size_t n = notches_in(&bench, NULL);
    ck_assert_uint_ge(n, 2);
    lstub_measured_notch first = found[0], one;
    LSTUB_INIT(one);
    LSTUB_INIT(err);
    ck_assert_int_eq(lstub_find_notches(bench.f, bench.n, bench.s, 16, NULL, &one, 1, sizeof one, &count, NULL, NULL, &err), LSTUB_W_CAPACITY);
    ck_assert_uint_eq(count, n);
    ck_assert(memcmp(&one, &first, sizeof one) == 0);
    ck_assert_int_eq(lstub_find_notches(bench.f, bench.n, bench.s, 16, NULL, NULL, 0, 0, &count, NULL, NULL, &err), LSTUB_W_CAPACITY);
}
END_TEST

/* What no channel does must not break it: silence, steps, a needle, one value, few samples. */
START_TEST(nonsense_is_no_notch)
{
    for (int kind = 0; kind < 6; kind++) {
        bench.n = kind == 5 ? 16 : 1000;
        for (size_t i = 0; i < bench.n; i++) {
            double x = (double)i / (double)bench.n;
            bench.f[i] = kind == 4 ? (double)i * 1e-3 : 1e7 * (double)i;
            bench.s[2 * i] = kind == 0 ? 0.0 : kind == 1 ? 1.0 : kind == 2 ? (x < 0.5 ? 1.0 : 1e-6) : kind == 3 ? (i == 500 ? 0.0 : 1.0) : x;
            bench.s[2 * i + 1] = 0.0;
        }
        ck_assert_msg(notches_in(&bench, NULL) == 0, "kind %d: a notch at %g", kind, found[0].f);
        for (size_t i = 0; i < bench.n; i++)
            ck_assert(isfinite(averaged[i]) && isfinite(trend[i]));
    }
}
END_TEST

#define FIND(freq, n, s, stride, o) lstub_find_notches(freq, n, s, stride, o, found, NOTCHES, sizeof found[0], &count, averaged, trend, &err)

START_TEST(refused)
{
    int32_t quality;
    size_t count = 77;
    lstub_search o;
    alone(0.0, 1.6, &quality);
    for (size_t i = 0; i < NOTCHES; i++)
        poison(found[i]);
    averaged[0] = trend[0] = 123.0;
    assert_refused(FIND(NULL, bench.n, bench.s, 16, NULL), LSTUB_E_NULL, err, "freq");
    assert_refused(FIND(bench.f, bench.n, NULL, 16, NULL), LSTUB_E_NULL, err, "s = null");
    assert_refused(FIND(bench.f, bench.n, bench.s, 8, NULL), LSTUB_E_SIZE, err, "s_stride = 8 bytes|>= 16");
    assert_refused(FIND(bench.f, bench.n, bench.s, 20, NULL), LSTUB_E_SIZE, err, "s_stride = 20 bytes|multiple of 8");
    assert_refused(FIND(bench.f, 15, bench.s, 16, NULL), LSTUB_E_ARGUMENT, err, "n = 15|>= 16");
    assert_refused(lstub_find_notches(bench.f, bench.n, bench.s, 16, NULL, found, 1, sizeof found[0], NULL, NULL, NULL, &err), LSTUB_E_NULL, err,
                   "count");
    assert_refused(lstub_find_notches(bench.f, bench.n, bench.s, 16, NULL, NULL, 1, sizeof found[0], &count, NULL, NULL, &err), LSTUB_E_NULL, err,
                   "notches");
    assert_refused(lstub_find_notches(bench.f, bench.n, bench.s, 16, NULL, found, 1, 16, &count, NULL, NULL, &err), LSTUB_E_SIZE, err,
                   "notches: stride = 16");
    LSTUB_INIT(o);
    o.window = -1.0;
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, &o), LSTUB_E_ARGUMENT, err, "window = -1 Hz");
    LSTUB_INIT(o);
    o.f_low = 5e9;
    o.f_high = 4e9;
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, &o), LSTUB_E_GEOMETRY, err, "f_high = 4e+09 Hz|f_low = 5e+09 Hz");
    o.f_high = NAN;
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, &o), LSTUB_E_ARGUMENT, err, "f_high = nan");
    LSTUB_INIT(o);
    o.depth_least = 0.5;
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, &o), LSTUB_E_ARGUMENT, err, "depth_least = 0.5 dB|>= 1");
    LSTUB_INIT(o);
    o.f_low = bench.f[bench.n - 10];
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, &o), LSTUB_E_ARGUMENT, err, "10 within the band");
    double f = bench.f[7], s = bench.s[11];
    bench.f[7] = bench.f[6];
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, NULL), LSTUB_E_ARGUMENT, err, "item 7|freq|>");
    ck_assert_int_eq((int)err.index, 7);
    bench.f[7] = NAN;
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, NULL), LSTUB_E_ARGUMENT, err, "item 7|freq = nan");
    bench.f[7] = f;
    bench.s[11] = NAN;
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, NULL), LSTUB_E_ARGUMENT, err, "item 5|s = ");
    ck_assert_int_eq((int)err.index, 5);
    bench.s[11] = HUGE_VAL;
    assert_refused(FIND(bench.f, bench.n, bench.s, 16, NULL), LSTUB_E_ARGUMENT, err, "item 5|s = ");
    bench.s[11] = s;
    for (size_t i = 0; i < NOTCHES; i++)
        assert_untouched(found[i]);
    ck_assert(count == 77 && averaged[0] == 123.0 && trend[0] == 123.0);
}
END_TEST

START_TEST(memory_runs_out)
{
    test_memory memory;
    lstub_search o;
    size_t count = 77;
    int32_t quality, status = LSTUB_E_MEMORY;
    alone(0.0, 1.6, &quality);
    LSTUB_INIT(o);
    for (long fail = 1; status == LSTUB_E_MEMORY; fail++) {
        lstub_allocator a = test_allocator(&memory);
        memory.fail_at = fail;
        o.allocator = &a;
        count = 77;
        LSTUB_INIT(err);
        status = FIND(bench.f, bench.n, bench.s, 16, &o);
        ck_assert_int_eq(memory.live, 0);
        ck_assert(status == LSTUB_E_MEMORY ? count == 77 && fail < 10 : fail > 1);
    }
    ck_assert_int_eq(status, LSTUB_OK);
    ck_assert_uint_eq(count, 1);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("measure");
    TCase *real = tcase_create("channels"), *made = tcase_create("made"), *call = tcase_create("call");
    tcase_add_test(real, backplane_with_long_stubs);
    tcase_add_test(real, backplane_with_short_stubs);
    tcase_set_timeout(made, 300);
    tcase_add_checked_fixture(made, setup, teardown);
    tcase_add_test(made, drawn_stubs);
    tcase_add_loop_test(made, drawn_channels_without_stub, 0, 3);
    tcase_add_test(made, a_stub_alone);
    tcase_add_test(made, the_end_of_the_band);
    tcase_add_checked_fixture(call, setup, teardown);
    tcase_set_timeout(call, 120);
    tcase_add_test(call, elements_bands_windows);
    tcase_add_test(call, more_than_there_is_room);
    tcase_add_test(call, nonsense_is_no_notch);
    tcase_add_test(call, refused);
    tcase_add_test(call, memory_runs_out);
    suite_add_tcase(suite, real);
    suite_add_tcase(suite, made);
    suite_add_tcase(suite, call);
    return test_main(suite);
}
