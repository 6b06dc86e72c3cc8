/* Plans: every decision checked against the model through the public functions, the number of depths against brute force. */
#include "check_plan.h"

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
    assert_ok(lstub_model_create(board.stackup, &via, LOADED, NULL, &model, &err), err);
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

/* A fabricator who can do everything exactly: residuals of nothing are allowed, and whatever is drilled passes. */
START_TEST(random_boards_without_tolerances)
{
    static job_set set;
    lstub_capability c;
    LSTUB_INIT(c);
    teardown();
    board_of(0);
    for (uint64_t seed = 1; seed <= BOARDS; seed++) {
        random_jobs(&set, seed, 10);
        lstub_plan *plan = plan_of(&set, &c);
        for (size_t i = 0; i < set.count; i++) {
            lstub_decision d = decision_of(plan, i);
            check_decision(&set, i, &c, &d);
            ck_assert_int_eq(d.after.pass, d.action != LSTUB_ACTION_CANNOT);
        }
        check_depths(plan, set.count);
        lstub_plan_destroy(plan);
    }
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
        assert_ok(lstub_plan_create(board.stackup, twice, 2 * set.count, sizeof twice[0], &c, LOADED, NULL, &more, &err), err);
        lstub_plan_summary a = totals_of(once), b = totals_of(more);
        ck_assert(a.depths_top == b.depths_top && a.depths_bottom == b.depths_bottom && a.geometries == b.geometries && 2 * a.vias == b.vias);
        for (size_t i = 0; i < set.count; i++) {
            lstub_decision x = decision_of(once, i), y = decision_of(more, set.count + i), z = decision_of(more, set.count - 1 - i);
            ck_assert_mem_eq(&x, &y, sizeof x);
            ck_assert_mem_eq(&x, &z, sizeof x);
        }
        check_table(more, 2 * set.count);
        lstub_plan_destroy(once);
        lstub_plan_destroy(more);
    }
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("plan");
    TCase *boards = tcase_create("boards");
    tcase_add_checked_fixture(boards, setup, teardown);
    tcase_set_timeout(boards, 240);
    tcase_add_test(boards, random_boards);
    tcase_add_test(boards, random_boards_without_tolerances);
    tcase_add_test(boards, random_boards_with_allowed_depths);
    tcase_add_test(boards, order_and_copies_do_not_matter);
    suite_add_tcase(suite, boards);
    return test_main(suite);
}
