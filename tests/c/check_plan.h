/* What the suites of plans share: a board of nine copper layers, a fabricator, jobs with all that they point to. */
#ifndef CHECK_PLAN_H
#define CHECK_PLAN_H

#include "check_board.h"

static test_board  board;
static lstub_error err;

#define LAST 16                        /* layer index of the lowest copper, C8 */
#define MANY 64

static inline void board_of(double tolerance)
{
    LSTUB_INIT(err);
    board_layers(&board, "SPSPSPSPS", 0.2e-3, 35e-6);
    for (size_t i = 1; i < board.count; i += 2) {
        board.layer[i].tol_plus = tolerance * board.layer[i].thickness;
        board.layer[i].tol_minus = 0.8 * tolerance * board.layer[i].thickness;
    }
    assert_ok(board_create(&board, NULL, &err), err);
}

static inline void setup(void) { board_of(0.1); }

static inline void teardown(void)
{
    lstub_stackup_destroy(board.stackup);
    board.stackup = NULL;
}

static inline lstub_capability usual(void)
{
    lstub_capability c;
    LSTUB_INIT(c);
    c.depth_tolerance = 50e-6;
    c.cut_clearance = 50e-6;
    c.residual_min = 100e-6;
    c.residual_target = 150e-6;
    c.bit_oversize = 200e-6;
    c.wall_clearance = 150e-6;
    return c;
}

/* Jobs with all that they point to. */
typedef struct job_set {
    lstub_job       job[MANY];
    lstub_via       via[MANY];
    lstub_signal    signal[MANY];
    lstub_criteria  criteria[MANY];
    lstub_backdrill drill[MANY][2];
    int32_t         connects[MANY][2];
    size_t          count;
} job_set;

static inline lstub_via *add_job(job_set *set, int from, int to, double symbol_rate, double notch, double loss)
{
    size_t i = set->count++;
    ck_assert_uint_lt(i, MANY);
    set->connects[i][0] = copper(from);
    set->connects[i][1] = copper(to);
    set->via[i] = board_via(set->connects[i], 2);
    set->via[i].antipad = 0.9e-3;
    LSTUB_INIT(set->signal[i]);
    set->signal[i].symbol_rate = symbol_rate;
    LSTUB_INIT(set->criteria[i]);
    set->criteria[i].notch_over_nyquist = notch;
    set->criteria[i].added_loss_db = loss;
    LSTUB_INIT(set->job[i]);
    set->job[i].via = &set->via[i];
    set->job[i].signal = &set->signal[i];
    set->job[i].criteria = &set->criteria[i];
    return &set->via[i];
}

static inline lstub_plan *plan_of(const job_set *set, const lstub_capability *c)
{
    lstub_plan *plan = NULL;
    LSTUB_INIT(err);
    assert_ok(lstub_plan_create(board.stackup, set->job, set->count, sizeof set->job[0], c, LOADED, NULL, &plan, &err), err);
    return plan;
}

static inline lstub_decision decision_of(const lstub_plan *plan, size_t index)
{
    lstub_decision d;
    LSTUB_INIT(d);
    assert_ok(lstub_plan_decision(plan, index, &d, &err), err);
    return d;
}

static inline lstub_plan_summary totals_of(const lstub_plan *plan)
{
    lstub_plan_summary s;
    LSTUB_INIT(s);
    assert_ok(lstub_plan_totals(plan, &s, &err), err);
    return s;
}

/* One via planned on its own. */
static inline lstub_decision decide(const job_set *set, size_t index, const lstub_capability *c)
{
    lstub_plan *plan = NULL;
    assert_ok(lstub_plan_create(board.stackup, &set->job[index], 1, sizeof set->job[0], c, LOADED, NULL, &plan, &err), err);
    lstub_decision d = decision_of(plan, 0);
    lstub_plan_destroy(plan);
    return d;
}

static inline void check_totals(const lstub_plan *plan, const job_set *set)
{
    lstub_plan_summary t = totals_of(plan);
    int64_t count[7] = {0};
    double notch = INFINITY, loss = 0;
    int64_t outside = 0;
    for (size_t i = 0; i < set->count; i++) {
        lstub_decision d = decision_of(plan, i);
        count[d.action]++;
        if (d.action != LSTUB_ACTION_NOT_JUDGED && d.action != LSTUB_ACTION_REFUSED) {
            notch = fmin(notch, d.after.notch_over_nyquist);
            loss = fmax(loss, d.after.added_loss_db);
            outside += d.status > 0;
        }
    }
    ck_assert(t.vias == (int64_t)set->count && lstub_plan_count(plan) == set->count && t.not_judged == count[0] && t.keep == count[1]
              && t.drill_top == count[2] && t.drill_bottom == count[3] && t.drill_both == count[4] && t.cannot == count[5] && t.refused == count[6]);
    ck_assert_int_eq(t.outside_range, outside);
    ck_assert(t.worst_notch_over_nyquist == notch && t.worst_added_loss_db == loss);
    ck_assert(t.geometries >= 1 && t.geometries <= t.vias);
}

static inline void random_jobs(job_set *set, uint64_t seed, size_t count)
{
    memset(set, 0, sizeof *set);
    for (uint64_t n = 0; n < count; n++) {
        int from = test_random(seed, 8 * n) < 0.6 ? 0 : (int)(9 * test_random(seed, 8 * n + 1)), to = (int)(9 * test_random(seed, 8 * n + 2));
        double rate = 5e9 * pow(20.0, test_random(seed, 8 * n + 3));
        if (from == to)
            to = (to + 1) % 9;
        lstub_via *via = add_job(set, from, to, rate, 1.5 + test_random(seed, 8 * n + 4), test_random(seed, 8 * n + 5) < 0.5 ? 0 : 0.2 + test_random(seed, 8 * n + 6));
        via->drill = test_random(seed, 8 * n + 7) < 0.5 ? 0.2e-3 : 0.25e-3;
    }
}

static inline lstub_capability random_capability(uint64_t seed)
{
    lstub_capability c = usual();
    c.tolerance_method = (int32_t)(2 * test_random(seed, 1001));
    c.depth_tolerance = 100e-6 * test_random(seed, 1002);
    c.cut_clearance = 100e-6 * test_random(seed, 1003);
    c.residual_min = 150e-6 * test_random(seed, 1004);
    c.residual_target = 300e-6 * test_random(seed, 1005);
    c.sides = (int32_t)(5 * test_random(seed, 1006));
    c.sides = c.sides > 3 ? 0 : c.sides;
    c.aspect_ratio = test_random(seed, 1007) < 0.3 ? 1 + 3 * test_random(seed, 1008) : 0;
    return c;
}

#endif
