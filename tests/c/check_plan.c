/* Plans: every decision checked against the model through the public functions, the number of depths against brute force. */
#include "check_board.h"

static test_board  board;
static lstub_error err;

#define LAST 16                        /* layer index of the lowest copper, C8 */
#define MANY 64

static void board_of(double tolerance)
{
    LSTUB_INIT(err);
    board_layers(&board, "SPSPSPSPS", 0.2e-3, 35e-6);
    for (size_t i = 1; i < board.count; i += 2) {
        board.layer[i].tol_plus = tolerance * board.layer[i].thickness;
        board.layer[i].tol_minus = 0.8 * tolerance * board.layer[i].thickness;
    }
    assert_ok(board_create(&board, NULL, &err), err);
}

static void setup(void) { board_of(0.1); }

static void teardown(void)
{
    lstub_stackup_destroy(board.stackup);
    board.stackup = NULL;
}

static lstub_capability usual(void)
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

static lstub_via *add_job(job_set *set, int from, int to, double symbol_rate, double notch, double loss)
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

static lstub_plan *plan_of(const job_set *set, const lstub_capability *c)
{
    lstub_plan *plan = NULL;
    LSTUB_INIT(err);
    assert_ok(lstub_plan_create(board.stackup, set->job, set->count, sizeof set->job[0], c, NULL, NULL, &plan, &err), err);
    return plan;
}

static lstub_decision decision_of(const lstub_plan *plan, size_t index)
{
    lstub_decision d;
    LSTUB_INIT(d);
    assert_ok(lstub_plan_decision(plan, index, &d, &err), err);
    return d;
}

static lstub_plan_summary totals_of(const lstub_plan *plan)
{
    lstub_plan_summary s;
    LSTUB_INIT(s);
    assert_ok(lstub_plan_totals(plan, &s, &err), err);
    return s;
}

/* One via planned on its own. */
static lstub_decision decide(const job_set *set, size_t index, const lstub_capability *c)
{
    lstub_plan *plan = NULL;
    assert_ok(lstub_plan_create(board.stackup, &set->job[index], 1, sizeof set->job[0], c, NULL, NULL, &plan, &err), err);
    lstub_decision d = decision_of(plan, 0);
    lstub_plan_destroy(plan);
    return d;
}

/* ---- geometry, once more and by hand -------------------------------------------------------------- */

static double face_of(const lstub_via *via, int32_t side)
{
    int32_t exit = via->connects[0];
    double top, bottom;
    for (size_t i = 1; i < via->connect_count; i++)
        if (side == LSTUB_SIDE_TOP ? via->connects[i] < exit : via->connects[i] > exit)
            exit = via->connects[i];
    assert_ok(lstub_stackup_depth(board.stackup, exit, &top, &bottom, &err), err);
    return side == LSTUB_SIDE_TOP ? top : bottom;
}

static double board_thickness(void)
{
    double bottom;
    assert_ok(lstub_stackup_depth(board.stackup, LAST, NULL, &bottom, &err), err);
    return bottom;
}

/* Barrel from the surface of a side to the face of its outermost connecting layer. */
static double full_of(const lstub_via *via, int32_t side)
{
    return side == LSTUB_SIDE_TOP ? face_of(via, side) : board_thickness() - face_of(via, side);
}

/* How much shorter (sign -1) or longer (+1) a residual may come out. */
static double spread(const lstub_via *via, int32_t side, const lstub_capability *c, int sign)
{
    lstub_interval i;
    LSTUB_INIT(i);
    double face = face_of(via, side), t = c->depth_tolerance;
    if (full_of(via, side) == 0)
        return t;
    assert_ok(lstub_stackup_interval(board.stackup, side == LSTUB_SIDE_TOP ? 0 : face, side == LSTUB_SIDE_TOP ? face : board_thickness(), &i, &err), err);
    if (c->tolerance_method == LSTUB_TOLERANCE_RSS)
        return hypot(t, sign > 0 ? i.tol_rss_plus : i.tol_rss_minus);
    return t + (sign > 0 ? i.tol_plus : i.tol_minus);
}

/* The margin of the via with these residuals; the whole barrel where a residual is not less than it. */
static lstub_margin margin_with(const job_set *set, size_t i, double top, double bottom)
{
    lstub_backdrill drills[2];
    lstub_via via = set->via[i];
    lstub_model *model = NULL;
    lstub_margin m;
    double full_top = full_of(&via, LSTUB_SIDE_TOP), full_bottom = full_of(&via, LSTUB_SIDE_BOTTOM);
    via.backdrills = drills;
    via.backdrill_count = 0;
    if (top < full_top)
        drills[via.backdrill_count++] = (lstub_backdrill){LSTUB_SIDE_TOP, 0, full_top - top, via.drill};
    if (bottom < full_bottom)
        drills[via.backdrill_count++] = (lstub_backdrill){LSTUB_SIDE_BOTTOM, 0, full_bottom - bottom, via.drill};
    LSTUB_INIT(m);
    assert_ok(lstub_model_create(board.stackup, &via, NULL, NULL, &model, &err), err);
    ck_assert_int_ge(lstub_model_margin(model, set->job[i].signal, set->job[i].criteria, &m, &err), 0);
    lstub_model_destroy(model);
    return m;
}

static int passes_with(const job_set *set, size_t i, double top, double bottom) { return margin_with(set, i, top, bottom).pass; }

/* ---- what every decision must keep ---------------------------------------------------------------- */

static void check_cut(const job_set *set, size_t i, const lstub_capability *c, const lstub_drill_cut *cut, int32_t side)
{
    const lstub_via *via = &set->via[i];
    double full = full_of(via, side), shrink = spread(via, side, c, -1), grow = spread(via, side, c, 1), hair = 1e-9;
    assert_close(cut->residual, full - cut->depth, 0, 1e-12, "by hand");
    assert_close(cut->residual_least, cut->residual - shrink, 0, 1e-12, "tolerances by hand");
    assert_close(cut->residual_most, cut->residual + grow, 0, 1e-12, "tolerances by hand");
    assert_close(cut->diameter, via->drill + c->bit_oversize, 1e-12, 0, "by hand");
    ck_assert(cut->depth >= cut->depth_least && cut->depth <= cut->depth_most);
    ck_assert_msg(cut->residual_least >= c->cut_clearance - hair, "clearance of %g m used up: %g m", c->cut_clearance, cut->residual_least);
    ck_assert_msg(cut->residual >= c->residual_min - hair, "residual %g m", cut->residual);
    ck_assert(cut->residual_most <= cut->limit + hair);
    ck_assert((c->sides == 0 ? LSTUB_SIDE_BOTH : c->sides) & side);
    if (c->aspect_ratio > 0)
        ck_assert(cut->depth <= c->aspect_ratio * cut->diameter + hair);
    int32_t face = side == LSTUB_SIDE_TOP ? via->connects[0] : via->connects[1];
    if (via->connects[0] > via->connects[1])
        face = side == LSTUB_SIDE_TOP ? via->connects[1] : via->connects[0];
    ck_assert_int_eq(cut->must_not_cut, face);
    if (c->depth_count > 0) {
        size_t k = 0;
        while (k < c->depth_count && c->depths[k] != cut->depth)
            k++;
        double near = INFINITY;
        for (size_t j = 0; j < c->depth_count; j++)
            near = fmin(near, fabs(c->depths[j] - cut->depth));
        ck_assert_msg(k < c->depth_count, "depth %.17g m is none of those allowed, the nearest is off by %g m", cut->depth, near);
    }
}

static void check_decision(const job_set *set, size_t i, const lstub_capability *c, const lstub_decision *d)
{
    const lstub_via *via = &set->via[i];
    double top = full_of(via, LSTUB_SIDE_TOP), bottom = full_of(via, LSTUB_SIDE_BOTTOM);
    int keeps = passes_with(set, i, top, bottom);
    ck_assert_int_eq(d->action == LSTUB_ACTION_KEEP, keeps);
    ck_assert_int_eq(d->before.pass, keeps);
    ck_assert_int_eq(d->top.drilled, d->action == LSTUB_ACTION_DRILL_TOP || d->action == LSTUB_ACTION_DRILL_BOTH);
    ck_assert_int_eq(d->bottom.drilled, d->action == LSTUB_ACTION_DRILL_BOTTOM || d->action == LSTUB_ACTION_DRILL_BOTH);
    if (d->top.drilled) {
        check_cut(set, i, c, &d->top, LSTUB_SIDE_TOP);
        top = d->top.residual_most;
    }
    if (d->bottom.drilled) {
        check_cut(set, i, c, &d->bottom, LSTUB_SIDE_BOTTOM);
        bottom = d->bottom.residual_most;
    }
    lstub_margin after = margin_with(set, i, top, bottom);
    assert_close(d->after.f1, after.f1, 1e-9, 0, "identity: the model of the drilled via");
    assert_close(d->after.added_loss_db, after.added_loss_db, 1e-6, 1e-9, "identity: the model of the drilled via");
    if (d->top.drilled || d->bottom.drilled)
        ck_assert_msg(after.pass, "drilled, and fails with the longest residual: notch %g x Nyquist, %g dB", after.notch_over_nyquist, after.added_loss_db);
}

/* Least residual that the fabricator can hold on a side; the whole barrel where the side cannot be drilled. */
static double least_residual(const lstub_via *via, int32_t side, const lstub_capability *c)
{
    double full = full_of(via, side), shrink = spread(via, side, c, -1), r = fmax(c->residual_min, c->cut_clearance + shrink);
    if (full == 0 || ((c->sides == 0 ? LSTUB_SIDE_BOTH : c->sides) & side) == 0)
        return full;
    if (c->aspect_ratio > 0)
        r = fmax(r, full - c->aspect_ratio * (via->drill + c->bit_oversize));
    return fmin(full, r + spread(via, side, c, 1));
}

/* One side is drilled only where it is enough, both only where one is not, and none only where nothing is. Any depth allowed. */
static void check_action(const job_set *set, size_t i, const lstub_capability *c, const lstub_decision *d)
{
    const lstub_via *via = &set->via[i];
    double full[2] = {full_of(via, LSTUB_SIDE_TOP), full_of(via, LSTUB_SIDE_BOTTOM)};
    double least[2] = {least_residual(via, LSTUB_SIDE_TOP, c), least_residual(via, LSTUB_SIDE_BOTTOM, c)};
    int top = least[0] < full[0] && passes_with(set, i, least[0], full[1]);
    int bottom = least[1] < full[1] && passes_with(set, i, full[0], least[1]);
    int both = least[0] < full[0] && least[1] < full[1] && passes_with(set, i, least[0], least[1]);
    if (d->action == LSTUB_ACTION_KEEP)
        return;
    if (top || bottom)
        ck_assert_msg(d->action == LSTUB_ACTION_DRILL_TOP ? top : d->action == LSTUB_ACTION_DRILL_BOTTOM && bottom,
                      "top is%s enough, bottom is%s, decided: %s", top ? "" : " not", bottom ? "" : " not", lstub_action_name(d->action));
    else
        ck_assert_msg(d->action == (both ? LSTUB_ACTION_DRILL_BOTH : LSTUB_ACTION_CANNOT), "both are%s enough, decided: %s (%s)",
                      both ? "" : " not", lstub_action_name(d->action), lstub_reason_name(d->reason));
}

/* The range of depths is as wide as it can be: 2 um shallower fails the criteria. One side drilled, any depth allowed. */
static void check_range_is_whole(const job_set *set, size_t i, const lstub_capability *c, const lstub_decision *d)
{
    const lstub_via *via = &set->via[i];
    int32_t side = d->top.drilled ? LSTUB_SIDE_TOP : LSTUB_SIDE_BOTTOM;
    const lstub_drill_cut *cut = d->top.drilled ? &d->top : &d->bottom;
    double full = full_of(via, side), other = full_of(via, LSTUB_SIDE_BOTH - side), grow = spread(via, side, c, 1);
    double longest = full - cut->depth_least + grow, least = least_residual(via, side, c) - grow;
    if (d->top.drilled && d->bottom.drilled)
        return;
    if (longest + 2e-6 < full)
        ck_assert_msg(!(side == LSTUB_SIDE_TOP ? passes_with(set, i, longest + 2e-6, other) : passes_with(set, i, other, longest + 2e-6)),
                      "depths from %.9g m: 2 um less would do", cut->depth_least);
    assert_close(cut->depth_most, full - least, 0, 1e-9, "deepest place by hand");
}

/* ---- fewest depths, by trying all choices --------------------------------------------------------- */

typedef struct span {
    double low, high;
} span;

/* Fewest points that stab all spans: an optimal set exists among their upper ends. Tries sets of 1, 2, 3 ... of these. */
static int stabbed(const span *s, size_t n, const double *points, int count, size_t from, int left)
{
    if (left == 0) {
        for (size_t i = 0; i < n; i++) {
            int hit = 0;
            for (int k = 0; k < count; k++)
                hit |= points[k] >= s[i].low && points[k] <= s[i].high;
            if (!hit)
                return 0;
        }
        return 1;
    }
    for (size_t i = from; i < n; i++) {
        double more[MANY];
        memcpy(more, points, (size_t)count * sizeof *more);
        more[count] = s[i].high;
        if (stabbed(s, n, more, count + 1, i + 1, left - 1))
            return 1;
    }
    return 0;
}

static int fewest(const span *s, size_t n)
{
    double none[1];
    for (int count = 0;; count++)
        if (stabbed(s, n, none, 0, 0, count))
            return count;
}

static int different(const double *x, size_t n)
{
    int count = 0;
    for (size_t i = 0; i < n; i++) {
        size_t j = 0;
        while (j < i && x[j] != x[i])
            j++;
        count += j == i;
    }
    return count;
}

static void check_depths(const lstub_plan *plan, size_t count)
{
    lstub_plan_summary totals = totals_of(plan);
    for (int32_t side = LSTUB_SIDE_TOP; side <= LSTUB_SIDE_BOTTOM; side++) {
        span spans[MANY];
        double depths[MANY];
        size_t n = 0;
        for (size_t i = 0; i < count; i++) {
            lstub_decision d = decision_of(plan, i);
            const lstub_drill_cut *cut = side == LSTUB_SIDE_TOP ? &d.top : &d.bottom;
            if (cut->drilled) {
                spans[n] = (span){cut->depth_least, cut->depth_most};
                depths[n++] = cut->depth;
            }
        }
        int32_t told = side == LSTUB_SIDE_TOP ? totals.depths_top : totals.depths_bottom;
        ck_assert_int_eq(told, different(depths, n));
        ck_assert_msg(told == fewest(spans, n), "%d depths from side %d, %d would do for %zu vias", (int)told, (int)side, fewest(spans, n), n);
    }
}

static void check_table(const lstub_plan *plan, size_t count)
{
    lstub_plan_summary totals = totals_of(plan);
    int32_t hits[2 * MANY] = {0}, cuts = 0;
    double most[2 * MANY] = {0};
    ck_assert_int_eq(lstub_plan_group_count(plan), totals.groups);
    for (size_t i = 0; i < count; i++) {
        lstub_decision d = decision_of(plan, i);
        for (int32_t side = LSTUB_SIDE_TOP; side <= LSTUB_SIDE_BOTTOM; side++) {
            const lstub_drill_cut *cut = side == LSTUB_SIDE_TOP ? &d.top : &d.bottom;
            lstub_drill_group row;
            LSTUB_INIT(row);
            if (!cut->drilled) {
                ck_assert_int_eq(cut->group, -1);
                continue;
            }
            cuts++;
            assert_ok(lstub_plan_group(plan, cut->group, &row, &err), err);
            ck_assert(row.side == side && row.depth == cut->depth && row.diameter == cut->diameter && row.must_not_cut == cut->must_not_cut);
            ck_assert_int_eq(row.from_layer, side == LSTUB_SIDE_TOP ? 0 : LAST);
            hits[cut->group]++;
            most[cut->group] = fmax(most[cut->group], cut->residual_most);
        }
    }
    for (int32_t g = 0; g < totals.groups; g++) {
        lstub_drill_group row;
        LSTUB_INIT(row);
        assert_ok(lstub_plan_group(plan, g, &row, &err), err);
        ck_assert_int_eq(row.hits, hits[g]);
        ck_assert(row.residual_most == most[g]);
        cuts -= row.hits;
    }
    ck_assert_int_eq(cuts, 0);
}

static void check_totals(const lstub_plan *plan, const job_set *set)
{
    lstub_plan_summary t = totals_of(plan);
    int64_t count[7] = {0};
    double notch = INFINITY, loss = 0;
    for (size_t i = 0; i < set->count; i++) {
        lstub_decision d = decision_of(plan, i);
        count[d.action]++;
        if (d.action != LSTUB_ACTION_NOT_JUDGED && d.action != LSTUB_ACTION_REFUSED) {
            notch = fmin(notch, d.after.notch_over_nyquist);
            loss = fmax(loss, d.after.added_loss_db);
        }
    }
    ck_assert(t.vias == (int64_t)set->count && lstub_plan_count(plan) == set->count && t.not_judged == count[0] && t.keep == count[1]
              && t.drill_top == count[2] && t.drill_bottom == count[3] && t.drill_both == count[4] && t.cannot == count[5] && t.refused == count[6]);
    ck_assert(t.worst_notch_over_nyquist == notch && t.worst_added_loss_db == loss);
    ck_assert(t.geometries >= 1 && t.geometries <= t.vias);
}

static void random_jobs(job_set *set, uint64_t seed, size_t count)
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

static lstub_capability random_capability(uint64_t seed)
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

enum { BOARDS = 400 };

/* Every via of many boards: the decision holds, is the right one, and the depths are the fewest. */
START_TEST(random_boards)
{
    static job_set set;
    int actions[7] = {0}, shared = 0;
    for (uint64_t seed = 1; seed <= BOARDS; seed++) {
        lstub_capability c = random_capability(seed);
        teardown();
        board_of(seed % 3 == 0 ? 0 : 0.1 * test_random(seed, 1000));
        random_jobs(&set, seed, 1 + seed % 10);
        lstub_plan *plan = plan_of(&set, &c);
        for (size_t i = 0; i < set.count; i++) {
            lstub_decision d = decision_of(plan, i);
            actions[d.action]++;
            check_decision(&set, i, &c, &d);
            check_action(&set, i, &c, &d);
            if (d.top.drilled || d.bottom.drilled)
                check_range_is_whole(&set, i, &c, &d);
        }
        check_depths(plan, set.count);
        check_table(plan, set.count);
        check_totals(plan, &set);
        lstub_plan_summary t = totals_of(plan);
        shared += t.depths_bottom > 0 && t.depths_bottom < t.drill_bottom + t.drill_both;
        lstub_plan_destroy(plan);
    }
    for (int32_t a = LSTUB_ACTION_KEEP; a <= LSTUB_ACTION_CANNOT; a++)
        ck_assert_msg(actions[a] > 20, "only %d times '%s': the boards are no test of it", actions[a], lstub_action_name(a));
    ck_assert_msg(shared > 50, "depths shared on %d boards only", shared);
}
END_TEST

/* The same with a list of allowed depths: each depth is one of them, and their number the fewest. */
START_TEST(random_boards_with_allowed_depths)
{
    static job_set set;
    double depths[12];
    int drilled = 0, none_fits = 0;
    for (uint64_t seed = 1; seed <= BOARDS; seed++) {
        lstub_capability c = random_capability(seed);
        for (uint64_t k = 0; k < COUNT(depths); k++)
            depths[k] = 1e-4 * (1 + 17 * test_random(seed, 2000 + k));
        c.depths = depths;
        c.depth_count = COUNT(depths);
        random_jobs(&set, seed, 1 + seed % 10);
        lstub_plan *plan = plan_of(&set, &c);
        for (size_t i = 0; i < set.count; i++) {
            lstub_decision d = decision_of(plan, i);
            check_decision(&set, i, &c, &d);
            drilled += d.top.drilled || d.bottom.drilled;
            none_fits += d.reason == LSTUB_REASON_DEPTHS;
        }
        check_depths(plan, set.count);
        check_table(plan, set.count);
        lstub_plan_destroy(plan);
    }
    ck_assert_int_gt(drilled, 200);
    ck_assert_int_gt(none_fits, 5);
}
END_TEST

/* What is planned for a via does not hang on the order of the jobs, nor on how many are alike. */
START_TEST(order_and_copies_do_not_matter)
{
    static job_set set;
    for (uint64_t seed = 1; seed <= 40; seed++) {
        lstub_capability c = random_capability(seed);
        lstub_job twice[2 * MANY];
        lstub_plan *once, *more = NULL;
        random_jobs(&set, seed, 9);
        once = plan_of(&set, &c);
        for (size_t i = 0; i < set.count; i++) {
            twice[i] = set.job[set.count - 1 - i];
            twice[set.count + i] = set.job[i];
        }
        assert_ok(lstub_plan_create(board.stackup, twice, 2 * set.count, sizeof twice[0], &c, NULL, NULL, &more, &err), err);
        lstub_plan_summary a = totals_of(once), b = totals_of(more);
        ck_assert(a.depths_top == b.depths_top && a.depths_bottom == b.depths_bottom && a.geometries == b.geometries && 2 * a.vias == b.vias);
        for (size_t i = 0; i < set.count; i++) {
            lstub_decision x = decision_of(once, i), y = decision_of(more, set.count + i), z = decision_of(more, set.count - 1 - i);
            ck_assert_mem_eq(&x, &y, sizeof x);
            ck_assert_mem_eq(&x, &z, sizeof x);
        }
        lstub_plan_destroy(once);
        lstub_plan_destroy(more);
    }
}
END_TEST

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

/* Numbers of two of them by hand. */
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
    assert_ok(lstub_plan_create(board.stackup, NULL, 0, 0, &c, NULL, NULL, &plan, &err), err);
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
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, sizeof set.job[0], &c, NULL, &allocator, &plan, &err), bad[_i].status, err, bad[_i].words);
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
    assert_refused(lstub_plan_create(NULL, set.job, 1, sizeof set.job[0], &c, NULL, NULL, &plan, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_plan_create(board.stackup, NULL, 1, sizeof set.job[0], &c, NULL, NULL, &plan, &err), LSTUB_E_NULL, err, "jobs|null");
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, sizeof set.job[0], NULL, NULL, NULL, &plan, &err), LSTUB_E_NULL, err, "capability|null");
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, sizeof set.job[0], &c, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "out|null");
    assert_refused(lstub_plan_create(board.stackup, set.job, 1, 8, &c, NULL, NULL, &plan, &err), LSTUB_E_SIZE, err, "jobs|stride = 8");
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
        if (lstub_plan_create(board.stackup, set.job, set.count, sizeof set.job[0], &c, NULL, &allocator, &plan, &err) == LSTUB_OK) {
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
    Suite *suite = suite_create("plan");
    TCase *boards = tcase_create("boards"), *why = tcase_create("reasons"), *input = tcase_create("input");
    tcase_add_checked_fixture(boards, setup, teardown);
    tcase_add_checked_fixture(why, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_set_timeout(boards, 240);
    tcase_add_test(boards, random_boards);
    tcase_add_test(boards, random_boards_with_allowed_depths);
    tcase_add_test(boards, order_and_copies_do_not_matter);
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
    suite_add_tcase(suite, boards);
    suite_add_tcase(suite, why);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
