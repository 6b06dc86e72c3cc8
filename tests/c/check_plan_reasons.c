/* Plans: each reason with its words and numbers, and everything that is refused. */
#include "check_plan.h"

/* ---- reasons -------------------------------------------------------------------------------------- */

static lstub_on_layer  entries[2];
static lstub_backdrill drilled[1];

static void fast(job_set *s) { add_job(s, 0, 2, 56e9, 2, 0); }
static void slow(job_set *s) { add_job(s, 0, 2, 1e9, 2, 0); }
static void straight(job_set *s) { add_job(s, 0, 8, 56e9, 2, 0); }
static void silent(job_set *s) { fast(s); s->job[0].signal = NULL; }
static void lonely(job_set *s) { add_job(s, 2, 3, 56e9, 2, 0)->connect_count = 1; }
static void too_fast(job_set *s) { add_job(s, 0, 2, 900e9, 2, 0); }
static void thin(job_set *s) { add_job(s, 0, 7, 900e9, 2, 0); }
static void buried(job_set *s) { lstub_via *v = add_job(s, 1, 2, 56e9, 4, 0); v->start_layer = 2; v->end_layer = 14; }
static void done(job_set *s)
{
    lstub_via *v = add_job(s, 0, 2, 56e9, 3, 0);
    drilled[0] = (lstub_backdrill){LSTUB_SIDE_BOTTOM, 0, 0.3e-3, 0.45e-3};
    v->backdrills = drilled;
    v->backdrill_count = 1;
}
static void tight(job_set *s)
{
    lstub_via *v = add_job(s, 0, 2, 56e9, 2, 0);
    entries[0] = (lstub_on_layer){copper(4), 0, 0.6e-3};
    v->clear = entries;
    v->clear_count = 1;
}
static void pin_below(job_set *s) { lstub_via *v = add_job(s, 0, 2, 56e9, 2, 0); v->pin_side = LSTUB_SIDE_BOTTOM; v->pin_length = 1e-3; }
static void pin_above(job_set *s) { lstub_via *v = add_job(s, 0, 2, 56e9, 2, 0); v->pin_side = LSTUB_SIDE_TOP; v->pin_length = 1.5e-3; }
static void short_pin_above(job_set *s) { lstub_via *v = add_job(s, 0, 2, 56e9, 2, 0); v->pin_side = LSTUB_SIDE_TOP; v->pin_length = 0.5e-3; }
static void bad_drill(job_set *s) { add_job(s, 0, 2, 56e9, 2, 0)->drill = -1e-4; }
static void bad_rate(job_set *s) { add_job(s, 0, 2, 56, 2, 0); }
static void no_criteria(job_set *s) { fast(s); s->job[0].criteria = NULL; }
static void no_via(job_set *s) { fast(s); s->job[0].via = NULL; }
static void bad_job(job_set *s) { fast(s); s->job[0].size = 5; }
static void bad_and_silent(job_set *s) { bad_drill(s); s->job[0].signal = NULL; }

static void any(lstub_capability *c) { (void)c; }
static void only_top(lstub_capability *c) { c->sides = LSTUB_SIDE_TOP; }
static void shallow(lstub_capability *c) { c->aspect_ratio = 1; }
static void one_depth(lstub_capability *c)
{
    static const double depth[] = {0.3e-3};
    c->depths = depth;
    c->depth_count = 1;
}

static const struct {
    void      (*jobs)(job_set *s);
    void      (*fab)(lstub_capability *c);
    int32_t     action, reason, side, layer;
    const char *words;
} reasons[] = {
    {fast, any, LSTUB_ACTION_DRILL_BOTTOM, LSTUB_REASON_FAILS, LSTUB_SIDE_BOTTOM, -1, "Nyquist|2 wanted|bottom|C2"},
    {slow, any, LSTUB_ACTION_KEEP, LSTUB_REASON_PASSES, 0, -1, "Nyquist|2 wanted"},
    {straight, any, LSTUB_ACTION_KEEP, LSTUB_REASON_NO_STUB, 0, -1, "no stub"},
    {silent, any, LSTUB_ACTION_NOT_JUDGED, LSTUB_REASON_NO_SIGNAL, 0, -1, "signal"},
    {lonely, any, LSTUB_ACTION_NOT_JUDGED, LSTUB_REASON_ONE_LAYER, 0, 4, "C2"},
    {too_fast, any, LSTUB_ACTION_CANNOT, LSTUB_REASON_LIMIT_TOO_SHORT, LSTUB_SIDE_BOTTOM, -1, "bottom|mm"},
    {thin, any, LSTUB_ACTION_CANNOT, LSTUB_REASON_LIMIT_TOO_SHORT, LSTUB_SIDE_BOTTOM, -1, "bottom|mm"},
    {buried, any, LSTUB_ACTION_CANNOT, LSTUB_REASON_BURIED, LSTUB_SIDE_BOTTOM, -1, "bottom|surface"},
    {done, any, LSTUB_ACTION_CANNOT, LSTUB_REASON_DRILLED, LSTUB_SIDE_BOTTOM, -1, "bottom|drilled"},
    {fast, only_top, LSTUB_ACTION_CANNOT, LSTUB_REASON_SIDE, LSTUB_SIDE_BOTTOM, -1, "bottom|side"},
    {tight, any, LSTUB_ACTION_CANNOT, LSTUB_REASON_WALL, LSTUB_SIDE_BOTTOM, 8, "bottom|C4|mm"},
    {fast, shallow, LSTUB_ACTION_CANNOT, LSTUB_REASON_ASPECT, LSTUB_SIDE_BOTTOM, -1, "bottom|1 allowed"},
    {fast, one_depth, LSTUB_ACTION_CANNOT, LSTUB_REASON_DEPTHS, LSTUB_SIDE_BOTTOM, -1, "bottom|allowed depth"},
    {pin_below, any, LSTUB_ACTION_CANNOT, LSTUB_REASON_PIN, LSTUB_SIDE_BOTTOM, -1, "bottom|pin|1.0000 mm"},
    {pin_above, any, LSTUB_ACTION_CANNOT, LSTUB_REASON_PIN, LSTUB_SIDE_BOTTOM, -1, "bottom|pin|1.5000 mm"},
    {short_pin_above, any, LSTUB_ACTION_DRILL_BOTTOM, LSTUB_REASON_FAILS, LSTUB_SIDE_BOTTOM, -1, "bottom"},
    {bad_drill, any, LSTUB_ACTION_REFUSED, LSTUB_REASON_ERROR, 0, -1, "drill = -0.0001 m"},
    {bad_rate, any, LSTUB_ACTION_REFUSED, LSTUB_REASON_ERROR, 0, -1, "symbol_rate = 56 Bd"},
    {no_criteria, any, LSTUB_ACTION_REFUSED, LSTUB_REASON_ERROR, 0, -1, "criteria|null"},
    {no_via, any, LSTUB_ACTION_REFUSED, LSTUB_REASON_ERROR, 0, -1, "via|null"},
    {bad_job, any, LSTUB_ACTION_REFUSED, LSTUB_REASON_ERROR, 0, -1, "job|size = 5"},
};

START_TEST(each_reason)
{
    static job_set set;
    lstub_capability c = usual();
    char text[LSTUB_REASON_MAX], word[64];
    const char *words = reasons[_i].words;
    memset(&set, 0, sizeof set);
    reasons[_i].jobs(&set);
    reasons[_i].fab(&c);
    lstub_plan *plan = plan_of(&set, &c);
    lstub_decision d = decision_of(plan, 0);
    assert_ok(lstub_plan_reason(plan, 0, text, sizeof text, &err), err);
    ck_assert_msg(d.action == reasons[_i].action, "%s, not %s: %s", lstub_action_name(d.action), lstub_action_name(reasons[_i].action), text);
    ck_assert_msg(d.reason == reasons[_i].reason, "%s, not %s: %s", lstub_reason_name(d.reason), lstub_reason_name(reasons[_i].reason), text);
    ck_assert_msg(d.reason_side == reasons[_i].side, "side %d: %s", (int)d.reason_side, text);
    ck_assert_msg(d.reason_layer == reasons[_i].layer, "layer %d: %s", (int)d.reason_layer, text);
    ck_assert_int_eq(d.status < 0, d.action == LSTUB_ACTION_REFUSED);
    for (size_t n; *words != '\0'; words += n + (words[n] == '|')) {
        n = strcspn(words, "|");
        memcpy(word, words, n);
        word[n] = '\0';
        ck_assert_msg(strstr(text, word) != NULL, "no '%s' in '%s'", word, text);
    }
    if (d.action != LSTUB_ACTION_REFUSED)
        check_totals(plan, &set);
    lstub_plan_destroy(plan);
}
END_TEST

/* Numbers of three of them by hand. */
START_TEST(reasons_by_hand)
{
    static job_set set;
    lstub_capability c = usual();
    memset(&set, 0, sizeof set);
    add_job(&set, 0, 2, 56e9, 2, 0);
    pin_above(&set);
    set.via[1].pin_length = 0.8e-3;
    set.signal[1].symbol_rate = 25e9;
    c.residual_target = 0;
    lstub_decision d = decide(&set, 0, &c), p = decide(&set, 1, &c);
    /* C2 ends at 505 um, the board at 1915: six dielectrics of 0.2 mm with +20 -16 um below it. */
    double shrink = 50e-6 + 6 * 16e-6, full = 1410e-6;
    assert_close(d.stub_bottom, full, 1e-9, 0, "by hand");
    assert_close(full - d.bottom.depth_most, 50e-6 + shrink, 1e-9, 0, "clearance and tolerances, by hand");
    assert_close(d.bottom.residual_most - d.bottom.residual, 50e-6 + 6 * 20e-6, 1e-9, 0, "tolerances by hand");
    /* The pin keeps 0.8 mm of barrel from the top, 505 um of which lie above the face of C2. */
    assert_close(full - p.bottom.depth_most, 0.8e-3 - 505e-6 + shrink, 1e-9, 0, "pin and tolerances, by hand");
    /* Copper too near to the bit on C4: the tip stays below its lower face, 470 um further down. */
    set.via[0].clear = (entries[0] = (lstub_on_layer){copper(4), 0, 0.6e-3}, entries);
    set.via[0].clear_count = 1;
    set.signal[0].symbol_rate = 25e9;
    d = decide(&set, 0, &c);
    ck_assert_int_eq(d.action, LSTUB_ACTION_DRILL_BOTTOM);
    assert_close(full - d.bottom.depth_most, 470e-6 + shrink, 1e-9, 0, "copper and tolerances, by hand");
    c.tolerance_method = LSTUB_TOLERANCE_RSS;
    d = decide(&set, 0, &c);
    assert_close(d.bottom.residual_most - d.bottom.residual, sqrt(50 * 50 + 6 * 20 * 20) * 1e-6, 1e-9, 0, "root of the sum of squares, by hand");
}
END_TEST

/* Where there is room, the residual aimed at; where the list of depths has it, the depth nearest to it. */
START_TEST(residual_target_is_aimed_at)
{
    static job_set set;
    lstub_capability c = usual();
    memset(&set, 0, sizeof set);
    add_job(&set, 0, 2, 25e9, 2, 0);
    c.residual_target = 300e-6;
    lstub_decision d = decide(&set, 0, &c);
    ck_assert_int_eq(d.action, LSTUB_ACTION_DRILL_BOTTOM);
    ck_assert(d.bottom.depth_least < 1.10e-3 && d.bottom.depth_most > 1.12e-3);
    assert_close(d.bottom.residual, 300e-6, 0, 5.1e-5, "the target, rounded to what a drill is set to");
}
END_TEST

START_TEST(vias_in_error_do_not_stop_the_board)
{
    static job_set set;
    lstub_capability c = usual();
    memset(&set, 0, sizeof set);
    add_job(&set, 0, 2, 56e9, 2, 0);
    bad_drill(&set);
    add_job(&set, 0, 3, 56e9, 2, 0);
    lstub_plan *plan = plan_of(&set, &c);
    ck_assert_int_eq(decision_of(plan, 1).action, LSTUB_ACTION_REFUSED);
    ck_assert_int_eq(decision_of(plan, 1).status, LSTUB_E_ARGUMENT);
    lstub_decision alone = decide(&set, 2, &c), with = decision_of(plan, 2);
    ck_assert(alone.action == with.action && alone.bottom.depth_least == with.bottom.depth_least);
    ck_assert_int_eq(totals_of(plan).refused, 1);
    lstub_plan_destroy(plan);
    memset(&set, 0, sizeof set);
    bad_and_silent(&set);
    plan = plan_of(&set, &c);
    ck_assert_int_eq(decision_of(plan, 0).action, LSTUB_ACTION_NOT_JUDGED);
    lstub_plan_destroy(plan);
}
END_TEST

START_TEST(empty_board)
{
    lstub_capability c = usual();
    lstub_plan *plan = NULL;
    lstub_decision d;
    lstub_drill_group g;
    poison(d);
    poison(g);
    assert_ok(lstub_plan_create(board.stackup, NULL, 0, 0, &c, LOADED, NULL, &plan, &err), err);
    lstub_plan_summary t = totals_of(plan);
    ck_assert(t.vias == 0 && t.groups == 0 && t.depths_top == 0 && t.depths_bottom == 0 && t.geometries == 0);
    ck_assert(isinf(t.worst_notch_over_nyquist) && lstub_plan_count(plan) == 0 && lstub_plan_group_count(plan) == 0);
    assert_refused(lstub_plan_decision(plan, 0, &d, &err), LSTUB_E_ARGUMENT, err, "index = 0");
    assert_refused(lstub_plan_group(plan, 0, &g, &err), LSTUB_E_ARGUMENT, err, "index = 0");
    assert_untouched(d);
    assert_untouched(g);
    lstub_plan_destroy(plan);
}
END_TEST

/* ---- input ---------------------------------------------------------------------------------------- */

#define SPOIL(name, ...) static void name(lstub_capability *c) { __VA_ARGS__; }
static const double bad_depths[] = {1e-3, NAN}, negative_depth[] = {-1e-3};
SPOIL(sides_4, c->sides = 4)
SPOIL(sides_negative, c->sides = -1)
SPOIL(method_2, c->tolerance_method = 2)
SPOIL(tolerance_negative, c->depth_tolerance = -1e-6)
SPOIL(tolerance_nan, c->depth_tolerance = NAN)
SPOIL(clearance_nan, c->cut_clearance = NAN)
SPOIL(clearance_huge, c->cut_clearance = 50)
SPOIL(residual_negative, c->residual_min = -1e-6)
SPOIL(target_infinite, c->residual_target = INFINITY)
SPOIL(oversize_negative, c->bit_oversize = -1e-6)
SPOIL(wall_nan, c->wall_clearance = NAN)
SPOIL(aspect_negative, c->aspect_ratio = -10)
SPOIL(depths_null, c->depth_count = 2)
SPOIL(depths_nan, c->depths = bad_depths; c->depth_count = 2)
SPOIL(depths_negative, c->depths = negative_depth; c->depth_count = 1)
SPOIL(capability_size, c->size = 3)

static const struct {
    void      (*spoil)(lstub_capability *c);
    int32_t     status;
    const char *words;
} bad[] = {
    {sides_4, LSTUB_E_ARGUMENT, "sides = 4"},
    {sides_negative, LSTUB_E_ARGUMENT, "sides = -1"},
    {method_2, LSTUB_E_ARGUMENT, "tolerance_method = 2"},
    {tolerance_negative, LSTUB_E_ARGUMENT, "depth_tolerance = -1e-06 m"},
    {tolerance_nan, LSTUB_E_ARGUMENT, "depth_tolerance = nan"},
    {clearance_nan, LSTUB_E_ARGUMENT, "cut_clearance = nan"},
    {clearance_huge, LSTUB_E_ARGUMENT, "cut_clearance = 50 m|0.1"},
    {residual_negative, LSTUB_E_ARGUMENT, "residual_min = -1e-06 m"},
    {target_infinite, LSTUB_E_ARGUMENT, "residual_target = inf"},
    {oversize_negative, LSTUB_E_ARGUMENT, "bit_oversize = -1e-06 m"},
    {wall_nan, LSTUB_E_ARGUMENT, "wall_clearance = nan"},
    {aspect_negative, LSTUB_E_ARGUMENT, "aspect_ratio = -10"},
    {depths_null, LSTUB_E_NULL, "depths = null|2"},
    {depths_nan, LSTUB_E_ARGUMENT, "depths[1]|nan"},
    {depths_negative, LSTUB_E_ARGUMENT, "depths[0]|-0.001 m"},
    {capability_size, LSTUB_E_SIZE, "capability|size = 3"},
};

START_TEST(bad_capabilities)
{
    static job_set set;
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    lstub_capability c = usual();
    lstub_plan *plan = NULL;
    memset(&set, 0, sizeof set);
    fast(&set);
    bad[_i].spoil(&c);
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, sizeof set.job[0], &c, LOADED, &allocator, &plan, &err), bad[_i].status, err, bad[_i].words);
    ck_assert_ptr_null(plan);
    ck_assert_int_eq(memory.live, 0);
}
END_TEST

START_TEST(bad_calls)
{
    static job_set set;
    lstub_capability c = usual();
    lstub_model_options o;
    lstub_plan *plan = NULL;
    lstub_decision d;
    lstub_plan_summary t;
    char text[LSTUB_REASON_MAX], small[12];
    LSTUB_INIT(o);
    o.fidelity = 77;
    poison(d);
    poison(t);
    memset(&set, 0, sizeof set);
    fast(&set);
    assert_refused(lstub_plan_create(NULL, set.job, 1, sizeof set.job[0], &c, LOADED, NULL, &plan, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_plan_create(board.stackup, NULL, 1, sizeof set.job[0], &c, LOADED, NULL, &plan, &err), LSTUB_E_NULL, err, "jobs|null");
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, sizeof set.job[0], NULL, NULL, NULL, &plan, &err), LSTUB_E_NULL, err, "capability|null");
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, sizeof set.job[0], &c, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "out|null");
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, 8, &c, LOADED, NULL, &plan, &err), LSTUB_E_SIZE, err, "jobs|stride = 8");
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, sizeof set.job[0], &c, &o, NULL, &plan, &err), LSTUB_E_ARGUMENT, err, "fidelity = 77");
    ck_assert_ptr_null(plan);
    plan = plan_of(&set, &c);
    assert_refused(lstub_plan_decision(plan, 1, &d, &err), LSTUB_E_ARGUMENT, err, "index = 1|1");
    assert_refused(lstub_plan_decision(NULL, 0, &d, &err), LSTUB_E_NULL, err, "plan|null");
    assert_refused(lstub_plan_decision(plan, 0, NULL, &err), LSTUB_E_NULL, err, "null");
    assert_refused(lstub_plan_totals(NULL, &t, &err), LSTUB_E_NULL, err, "plan|null");
    assert_refused(lstub_plan_reason(plan, 5, text, sizeof text, &err), LSTUB_E_ARGUMENT, err, "index = 5");
    assert_refused(lstub_plan_reason(plan, 0, NULL, 10, &err), LSTUB_E_NULL, err, "text|null");
    assert_untouched(d);
    assert_untouched(t);
    memset(small, 'x', sizeof small);
    ck_assert_int_eq(lstub_plan_reason(plan, 0, small, 8, &err), LSTUB_W_CAPACITY);
    ck_assert(small[7] == '\0' && small[8] == 'x');
    assert_ok(lstub_plan_reason(plan, 0, text, sizeof text, &err), err);
    ck_assert_int_eq(strncmp(small, text, 7), 0);
    ck_assert_uint_eq(lstub_plan_count(NULL), 0);
    ck_assert_int_eq(lstub_plan_group_count(NULL), 0);
    lstub_plan_destroy(plan);
    lstub_plan_destroy(NULL);
}
END_TEST

START_TEST(names)
{
    for (int32_t i = -2; i < 20; i++) {
        ck_assert_str_ne(lstub_action_name(i), "");
        ck_assert_str_ne(lstub_reason_name(i), "");
        for (int32_t j = 0; j < i && j < 7 && i < 7; j++)
            ck_assert_str_ne(lstub_action_name(i), lstub_action_name(j));
        for (int32_t j = 0; j < i && j < 15 && i < 15; j++)
            ck_assert_str_ne(lstub_reason_name(i), lstub_reason_name(j));
    }
}
END_TEST

START_TEST(every_allocation_fails_once)
{
    static job_set set;
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    static const double depths[] = {1.0e-3, 1.1e-3, 0.9e-3};
    lstub_capability c = usual();
    lstub_plan *plan = NULL;
    random_jobs(&set, 5, 30);
    for (int i = 0; i < 20; i++)         /* enough refused ones that their messages need more room */
        bad_drill(&set), set.via[set.count - 1].drill = -1e-4 * (i + 1);
    c.depths = depths;
    c.depth_count = COUNT(depths);
    for (long n = 1;; n++) {
        LSTUB_INIT(err);
        memory.calls = 0;
        memory.fail_at = n;
        if (lstub_plan_create(board.stackup, set.job, set.count, sizeof set.job[0], &c, LOADED, &allocator, &plan, &err) == LSTUB_OK) {
            ck_assert_int_gt(n, 8);
            break;
        }
        ck_assert_int_eq(err.status, LSTUB_E_MEMORY);
        ck_assert_ptr_null(plan);
        ck_assert_int_eq(memory.live, 0);
    }
    ck_assert_int_eq(totals_of(plan).refused, 20);
    lstub_plan_destroy(plan);
    ck_assert_int_eq(memory.live, 0);
}
END_TEST

/* A plan needs nothing that it was made from. */
START_TEST(plan_stands_alone)
{
    static job_set set;
    lstub_capability c = usual();
    char before[LSTUB_REASON_MAX], after[LSTUB_REASON_MAX];
    random_jobs(&set, 7, 12);
    lstub_plan *plan = plan_of(&set, &c);
    size_t count = set.count;
    assert_ok(lstub_plan_reason(plan, 3, before, sizeof before, &err), err);
    memset(&set, POISON, sizeof set);
    teardown();
    for (size_t i = 0; i < count; i++)
        decision_of(plan, i);
    assert_ok(lstub_plan_reason(plan, 3, after, sizeof after, &err), err);
    ck_assert_str_eq(before, after);
    lstub_plan_destroy(plan);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("plan_reasons");
    TCase *why = tcase_create("reasons"), *input = tcase_create("input");
    tcase_add_checked_fixture(why, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_add_loop_test(why, each_reason, 0, (int)COUNT(reasons));
    tcase_add_test(why, reasons_by_hand);
    tcase_add_test(why, residual_target_is_aimed_at);
    tcase_add_test(why, vias_in_error_do_not_stop_the_board);
    tcase_add_test(why, empty_board);
    tcase_add_loop_test(input, bad_capabilities, 0, (int)COUNT(bad));
    tcase_add_test(input, bad_calls);
    tcase_add_test(input, names);
    tcase_add_test(input, every_allocation_fails_once);
    tcase_add_test(input, plan_stands_alone);
    suite_add_tcase(suite, why);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
