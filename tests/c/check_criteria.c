/* Criteria: margins by hand, inverse questions turned back, trade facts, and what is refused. */
#include "check_board.h"

static test_board   board;
static lstub_error  err;
static const int32_t to_c1[] = {0, 2}, to_c4[] = {0, 8}, inner[] = {6, 8}, through[] = {0, 14};

static void setup(void)
{
    LSTUB_INIT(err);
    board_make(&board, "SPSPSPPS", 0.2e-3, 35e-6);
}

static void teardown(void)
{
    lstub_stackup_destroy(board.stackup);
    board.stackup = NULL;
}

static lstub_signal signal_of(double symbol_rate, int32_t levels)
{
    lstub_signal s;
    LSTUB_INIT(s);
    s.symbol_rate = symbol_rate;
    s.levels = levels;
    return s;
}

static lstub_criteria criteria_of(double notch, double loss)
{
    lstub_criteria c;
    LSTUB_INIT(c);
    c.notch_over_nyquist = notch;
    c.added_loss_db = loss;
    return c;
}

static lstub_margin margin_on(const lstub_stackup *stackup, const lstub_via *via, lstub_signal s, lstub_criteria c)
{
    lstub_margin m;
    lstub_model *model = NULL;
    LSTUB_INIT(m);
    LSTUB_INIT(err);
    assert_ok(lstub_model_create(stackup, via, LOADED, NULL, &model, &err), err);
    ck_assert_int_ge(lstub_model_margin(model, &s, &c, &m, &err), 0);
    lstub_model_destroy(model);
    return m;
}

static lstub_margin margin(const lstub_via *via, lstub_signal s, lstub_criteria c) { return margin_on(board.stackup, via, s, c); }

/* ---- margins -------------------------------------------------------------------------------------- */

START_TEST(signals)
{
    lstub_signal s = signal_of(10e9, 0);
    double v;
    assert_ok(lstub_signal_bit_rate(&s, &v, &err), err);
    assert_close(v, 10e9, 0, 0, "the header: 0 levels are 2");
    for (int32_t levels = 2, bits = 1; levels <= 64; levels *= 2, bits++) {
        s = signal_of(10e9, levels);
        assert_ok(lstub_signal_bit_rate(&s, &v, &err), err);
        assert_close(v, bits * 10e9, 1e-15, 0, "log2 of the levels");
        assert_ok(lstub_signal_nyquist(&s, &v, &err), err);
        assert_close(v, 5e9, 0, 0, "half the symbol rate");
    }
    s = signal_of(10e9, 3);
    assert_ok(lstub_signal_bit_rate(&s, &v, &err), err);
    assert_close(v, 10e9 * log2(3), 1e-15, 0, "log2 of the levels");
}
END_TEST

START_TEST(margin_by_hand)
{
    lstub_via via = board_via(to_c1, 2);
    double f1, length, loss, nyquist = 7e9;
    lstub_margin m = margin(&via, signal_of(14e9, 4), criteria_of(3, 0.25));
    lstub_model *model = NULL;
    assert_ok(lstub_first_notch_batch(board.stackup, &via, 1, sizeof via, LOADED, &f1, NULL, &length, NULL, &err), err);
    assert_ok(lstub_model_create(board.stackup, &via, LOADED, NULL, &model, &err), err);
    assert_ok(lstub_model_added_loss(model, LSTUB_ALL_STUBS, &nyquist, 1, &loss, NULL, &err), err);
    lstub_model_destroy(model);
    assert_close(m.nyquist, 7e9, 0, 0, "half the symbol rate");
    assert_close(m.f1, f1, 1e-12, 0, "identity: the model's first notch");
    assert_close(m.notch_over_nyquist, f1 / 7e9, 1e-12, 0, "by hand");
    assert_close(m.notch_margin, f1 - 21e9, 1e-9, 0, "by hand");
    assert_close(m.added_loss_db, loss, 1e-12, 0, "identity: the model's added loss");
    assert_close(m.loss_margin_db, 0.25 - loss, 1e-9, 0, "by hand");
    assert_close(m.stub_length, length, 1e-12, 0, "identity");
    assert_close(m.rule_length, 0.0254 * 0.3 / 28, 1e-12, 0, "rule of thumb at 28 Gb/s, by hand");
    assert_close(m.rule_margin, m.rule_length - m.stub_length, 1e-12, 0, "by hand");
    ck_assert_int_eq(m.pass, m.notch_margin >= 0 && m.loss_margin_db >= 0);
}
END_TEST

START_TEST(only_what_is_asked)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_margin m = margin(&via, signal_of(1e9, 2), criteria_of(2, 0));
    ck_assert(m.pass && isnan(m.loss_margin_db) && m.limited_by == LSTUB_LIMIT_NOTCH);
    m = margin(&via, signal_of(1e9, 2), criteria_of(0, 0.5));
    ck_assert(m.pass && isnan(m.notch_margin) && m.limited_by == LSTUB_LIMIT_LOSS);
}
END_TEST

START_TEST(no_stub_no_limit)
{
    lstub_via via = board_via(through, 2);
    lstub_margin m = margin(&via, signal_of(112e9, 4), criteria_of(5, 0.1));
    ck_assert(m.pass == 1 && m.limited_by == LSTUB_LIMIT_NONE && isinf(m.f1) && m.f1 > 0 && m.added_loss_db == 0 && m.stub_length == 0);
    ck_assert(isinf(m.notch_over_nyquist) && m.loss_margin_db == 0.1);
}
END_TEST

/* Beyond the notch the loss falls again: a notch below Nyquist must fail the loss criterion whatever the loss there. */
START_TEST(notch_below_nyquist_is_no_pass)
{
    lstub_via via = board_via(to_c1, 2);
    double f1 = margin(&via, signal_of(1e9, 2), criteria_of(1, 0)).f1;
    for (double rate = 2 * f1; rate < 12 * f1; rate *= 1.02)
        ck_assert_msg(!margin(&via, signal_of(rate * 1.001, 2), criteria_of(0, 60)).pass, "passes at %g Bd", rate);
}
END_TEST

/* A notch right on Nyquist is no pass either, with loss or without. */
START_TEST(notch_on_nyquist_is_no_pass)
{
    for (int lossless = 0; lossless < 2; lossless++) {
        lstub_via via = board_via(to_c1, 2);
        board.dielectric.loss_tangent = lossless ? 0 : 0.004;
        teardown();
        assert_ok(board_create(&board, NULL, &err), err);
        for (int i = 0; i < 200; i++) {
            int32_t connects[2] = {0, copper(1 + i % 6)};
            via.connects = connects;
            via.drill = 0.2e-3 + 1e-6 * i;
            double f1 = margin(&via, signal_of(1e9, 2), criteria_of(1, 0)).f1;
            lstub_margin m = margin(&via, signal_of(2 * f1, 2), criteria_of(0, 3));
            ck_assert_msg(!m.pass && m.added_loss_db > 20 && m.loss_margin_db < -17, "notch on Nyquist: pass %d, %g dB", (int)m.pass, m.added_loss_db);
        }
    }
}
END_TEST

START_TEST(faster_signal_smaller_margin)
{
    lstub_via via = board_via(to_c4, 2);
    lstub_margin m, before = margin(&via, signal_of(1e9, 2), criteria_of(2, 1));
    int passed = before.pass;
    for (double rate = 2e9; rate < 200e9; rate *= 1.1) {
        m = margin(&via, signal_of(rate, 2), criteria_of(2, 1));
        ck_assert(m.notch_margin < before.notch_margin);
        if (rate < 2 * m.f1)
            ck_assert(m.loss_margin_db < before.loss_margin_db);
        ck_assert(passed || !m.pass);
        passed = m.pass;
        before = m;
    }
    ck_assert(!passed);
}
END_TEST

/* A stub of 25 mil in a board and a via as they are made: borne by a link with 14 GHz Nyquist, not by one with 29 GHz. */
START_TEST(stub_of_25_mil)
{
    const char *source = "common practice, no source: 25 mil pass at 14 GHz Nyquist, fail at 29 GHz";
    test_board b;
    int32_t connects[] = {0, copper(5)};
    lstub_via via = board_via(connects, 2);
    board_layers(&b, "SPSPSSPPS", 6 * MIL, 0.7 * MIL);      /* below C5: D5 C6 D6 C7 D7 C8, made 25 mil long */
    for (int i = 11; i <= 15; i += 2)
        b.layer[i].thickness = (25 - 3 * 0.7) / 3 * MIL;
    b.dielectric.dk = 3.7;
    b.dielectric.in_plane_ratio = 1.15;
    assert_ok(board_create(&b, NULL, &err), err);
    via.drill = 10 * MIL;
    via.pad_start = via.pad_inner = via.pad_end = 20 * MIL;
    via.antipad = 30 * MIL;
    via.return_distance = 40 * MIL;
    lstub_margin slow = margin_on(b.stackup, &via, signal_of(28e9, 2), criteria_of(2, 0)), fast = margin_on(b.stackup, &via, signal_of(58e9, 4), criteria_of(2, 0));
    assert_close(slow.stub_length, 25 * MIL, 1e-9, 0, "as built");
    ck_assert_msg(slow.pass, "%s: notch at %g Hz, %g x Nyquist", source, slow.f1, slow.notch_over_nyquist);
    ck_assert_msg(!fast.pass, "%s: notch at %g Hz, %g x Nyquist", source, fast.f1, fast.notch_over_nyquist);
    lstub_stackup_destroy(b.stackup);
}
END_TEST

/* ---- inverse questions ---------------------------------------------------------------------------- */

static lstub_stub_limit longest(const lstub_via *via, int32_t side, lstub_signal s, lstub_criteria c)
{
    lstub_stub_limit limit;
    LSTUB_INIT(limit);
    LSTUB_INIT(err);
    ck_assert_int_ge(lstub_longest_stub(board.stackup, via, side, LOADED, &s, &c, &limit, &err), 0);
    return limit;
}

/* The via drilled back from `side` so that `left` of its stub remain. */
static int passes_with(const lstub_via *via, int32_t side, double left, lstub_signal s, lstub_criteria c)
{
    double face, end;
    lstub_backdrill drill = {side, 0, 0, via->drill};
    lstub_via drilled = *via;
    int32_t exit = via->connects[side == LSTUB_SIDE_TOP ? 0 : via->connect_count - 1];
    if (side == LSTUB_SIDE_BOTTOM) {
        assert_ok(lstub_stackup_depth(board.stackup, exit, NULL, &face, &err), err);
        assert_ok(lstub_stackup_depth(board.stackup, 14, NULL, &end, &err), err);
        drill.depth = end - face - left;
    } else {
        assert_ok(lstub_stackup_depth(board.stackup, exit, &face, NULL, &err), err);
        drill.depth = face - left;
    }
    drilled.backdrills = &drill;
    drilled.backdrill_count = 1;
    return margin(&drilled, s, c).pass;
}

START_TEST(longest_stub_turned_back)
{
    static const double rates[] = {5e9, 10e9, 25e9, 53e9, 112e9};
    static const double limits[][2] = {{2, 0}, {3, 0}, {0, 0.3}, {0, 2}, {2, 0.5}};
    lstub_via vias[2] = {board_via(to_c1, 2), board_via(inner, 2)};
    int limited = 0;
    for (size_t v = 0; v < COUNT(vias); v++)
        for (int32_t side = v == 0 ? LSTUB_SIDE_BOTTOM : LSTUB_SIDE_TOP; side <= LSTUB_SIDE_BOTTOM; side++)
            for (size_t r = 0; r < COUNT(rates); r++)
                for (size_t k = 0; k < COUNT(limits); k++) {
                    lstub_signal s = signal_of(rates[r], 2);
                    lstub_criteria c = criteria_of(limits[k][0], limits[k][1]);
                    lstub_stub_limit l = longest(&vias[v], side, s, c);
                    ck_assert(l.length >= 0 && l.length <= l.stub_length);
                    if (l.limited_by == LSTUB_LIMIT_NONE) {
                        assert_close(l.length, l.stub_length, 1e-12, 0, "the header: the whole stub");
                        ck_assert(l.margin == 0 && margin(&vias[v], s, c).pass);
                        continue;
                    }
                    limited++;
                    assert_close(l.margin, l.length - l.stub_length, 1e-12, 1e-15, "by hand");
                    ck_assert(!margin(&vias[v], s, c).pass);
                    if (l.length > 2e-9)
                        ck_assert_msg(passes_with(&vias[v], side, l.length - 1e-9, s, c), "%g m less than the limit fails", 1e-9);
                    if (l.length < l.stub_length - 4e-9)
                        ck_assert_msg(!passes_with(&vias[v], side, l.length + 3e-9, s, c), "3 nm more than the limit of %.12g pass", l.length);
                }
    ck_assert_int_gt(limited, 20);
}
END_TEST

START_TEST(longest_stub_where_there_is_none)
{
    lstub_via via = board_via(to_c1, 2), straight = board_via(through, 2);
    lstub_signal s = signal_of(25e9, 2);
    lstub_criteria c = criteria_of(2, 0);
    lstub_stub_limit l;
    poison(l);
    assert_refused(lstub_longest_stub(board.stackup, &via, LSTUB_SIDE_TOP, LOADED, &s, &c, &l, &err), LSTUB_E_NONE, err, "side = 1");
    assert_refused(lstub_longest_stub(board.stackup, &straight, LSTUB_SIDE_BOTTOM, LOADED, &s, &c, &l, &err), LSTUB_E_NONE, err, "side = 2");
    assert_refused(lstub_longest_stub(board.stackup, &via, LSTUB_SIDE_BOTH, LOADED, &s, &c, &l, &err), LSTUB_E_ARGUMENT, err, "side = 3");
    assert_refused(lstub_longest_stub(board.stackup, &via, 0, LOADED, &s, &c, &l, &err), LSTUB_E_ARGUMENT, err, "side = 0");
    assert_refused(lstub_longest_stub(NULL, &via, 2, LOADED, &s, &c, &l, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_longest_stub(board.stackup, NULL, 2, LOADED, &s, &c, &l, &err), LSTUB_E_NULL, err, "via|null");
    assert_refused(lstub_longest_stub(board.stackup, &via, 2, LOADED, NULL, &c, &l, &err), LSTUB_E_NULL, err, "signal|null");
    assert_refused(lstub_longest_stub(board.stackup, &via, 2, LOADED, &s, NULL, &l, &err), LSTUB_E_NULL, err, "criteria|null");
    assert_refused(lstub_longest_stub(board.stackup, &via, 2, LOADED, &s, &c, NULL, &err), LSTUB_E_NULL, err, "null");
    via.drill = -1;
    assert_refused(lstub_longest_stub(board.stackup, &via, 2, LOADED, &s, &c, &l, &err), LSTUB_E_ARGUMENT, err, "drill = -1 m");
    assert_untouched(l);
}
END_TEST

START_TEST(highest_rate_turned_back)
{
    static const double limits[][2] = {{2, 0}, {4, 0}, {0, 0.1}, {0, 1}, {0, 90}, {2, 0.5}, {1.2, 6}};
    static const int32_t *const connects[] = {to_c1, to_c4, inner};
    for (size_t v = 0; v < COUNT(connects); v++)
        for (size_t k = 0; k < COUNT(limits); k++) {
            lstub_via via = board_via(connects[v], 2);
            lstub_criteria c = criteria_of(limits[k][0], limits[k][1]);
            lstub_model *model = NULL;
            int32_t by = -1;
            double rate = NAN;
            assert_ok(lstub_model_create(board.stackup, &via, LOADED, NULL, &model, &err), err);
            ck_assert_int_ge(lstub_highest_symbol_rate(model, &c, &rate, &by, &err), 0);
            ck_assert(rate > 0 && by != LSTUB_LIMIT_NONE);
            ck_assert_msg(margin(&via, signal_of(rate * (1 - 1e-7), 2), c).pass, "limits %g, %g dB: fails at %.9g Bd", limits[k][0], limits[k][1], rate);
            lstub_margin m = margin(&via, signal_of(rate * (1 + 1e-7), 2), c);
            ck_assert_msg(!m.pass, "limits %g, %g dB: passes above %.9g Bd", limits[k][0], limits[k][1], rate);
            ck_assert_int_eq(m.limited_by, by);
            lstub_model_destroy(model);
        }
}
END_TEST

START_TEST(highest_rate_without_limit)
{
    lstub_via via = board_via(through, 2);
    lstub_criteria c = criteria_of(2, 0.1), none = criteria_of(0, 0);
    lstub_model *model = NULL;
    double rate = NAN;
    int32_t by = -1;
    assert_ok(lstub_model_create(board.stackup, &via, LOADED, NULL, &model, &err), err);
    assert_ok(lstub_highest_symbol_rate(model, &c, &rate, &by, &err), err);
    ck_assert(isinf(rate) && by == LSTUB_LIMIT_NONE);
    rate = -7;
    assert_refused(lstub_highest_symbol_rate(NULL, &c, &rate, &by, &err), LSTUB_E_NULL, err, "model|null");
    assert_refused(lstub_highest_symbol_rate(model, NULL, &rate, &by, &err), LSTUB_E_NULL, err, "criteria|null");
    assert_refused(lstub_highest_symbol_rate(model, &c, NULL, &by, &err), LSTUB_E_NULL, err, "symbol_rate|null");
    assert_refused(lstub_highest_symbol_rate(model, &none, &rate, &by, &err), LSTUB_E_ARGUMENT, err, "criteria|0");
    ck_assert(rate == -7 && by == LSTUB_LIMIT_NONE);
    lstub_model_destroy(model);
}
END_TEST

/* ---- input ---------------------------------------------------------------------------------------- */

static const struct {
    double      rate;
    int32_t     levels, reserved;
    double      notch, loss;
    int32_t     status;
    const char *words;
} bad[] = {
    {0, 2, 0, 2, 0, LSTUB_E_ARGUMENT, "symbol_rate = 0 Bd|1e+06|1e+12"},
    {-1e9, 2, 0, 2, 0, LSTUB_E_ARGUMENT, "symbol_rate = -1e+09 Bd"},
    {NAN, 2, 0, 2, 0, LSTUB_E_ARGUMENT, "symbol_rate = nan"},
    {INFINITY, 2, 0, 2, 0, LSTUB_E_ARGUMENT, "symbol_rate = inf"},
    {56, 2, 0, 2, 0, LSTUB_E_ARGUMENT, "symbol_rate = 56 Bd"},          /* gigabauds given where bauds are asked */
    {56e9, 1, 0, 2, 0, LSTUB_E_ARGUMENT, "levels = 1|2|64"},
    {56e9, 65, 0, 2, 0, LSTUB_E_ARGUMENT, "levels = 65"},
    {56e9, -4, 0, 2, 0, LSTUB_E_ARGUMENT, "levels = -4"},
    {56e9, 4, 1, 2, 0, LSTUB_E_SIZE, "reserved = 1"},
    {56e9, 4, 0, 0, 0, LSTUB_E_ARGUMENT, "criteria|notch_over_nyquist|added_loss_db"},
    {56e9, 4, 0, -2, 0, LSTUB_E_ARGUMENT, "notch_over_nyquist = -2"},
    {56e9, 4, 0, NAN, 0, LSTUB_E_ARGUMENT, "notch_over_nyquist = nan"},
    {56e9, 4, 0, INFINITY, 0, LSTUB_E_ARGUMENT, "notch_over_nyquist = inf"},
    {56e9, 4, 0, 0, -1, LSTUB_E_ARGUMENT, "added_loss_db = -1 dB"},
    {56e9, 4, 0, 0, NAN, LSTUB_E_ARGUMENT, "added_loss_db = nan"},
    {56e9, 4, 0, 2, 1e9, LSTUB_E_ARGUMENT, "added_loss_db = 1e+09 dB|100"},
};

START_TEST(bad_signals_and_criteria)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_signal s = signal_of(bad[_i].rate, bad[_i].levels);
    lstub_criteria c = criteria_of(bad[_i].notch, bad[_i].loss);
    lstub_model *model = NULL;
    lstub_margin m;
    lstub_stub_limit l;
    double v = -7;
    s.reserved = bad[_i].reserved;
    poison(m);
    poison(l);
    assert_ok(lstub_model_create(board.stackup, &via, LOADED, NULL, &model, &err), err);
    assert_refused(lstub_model_margin(model, &s, &c, &m, &err), bad[_i].status, err, bad[_i].words);
    assert_refused(lstub_longest_stub(board.stackup, &via, LSTUB_SIDE_BOTTOM, LOADED, &s, &c, &l, &err), bad[_i].status, err, bad[_i].words);
    if (bad[_i].notch == 2 && bad[_i].loss == 0) {
        assert_refused(lstub_signal_nyquist(&s, &v, &err), bad[_i].status, err, bad[_i].words);
        assert_refused(lstub_signal_bit_rate(&s, &v, &err), bad[_i].status, err, bad[_i].words);
    } else {
        assert_refused(lstub_highest_symbol_rate(model, &c, &v, NULL, &err), bad[_i].status, err, bad[_i].words);
    }
    ck_assert(v == -7);
    assert_untouched(m);
    assert_untouched(l);
    lstub_model_destroy(model);
}
END_TEST

START_TEST(bad_calls)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_signal s = signal_of(56e9, 4);
    lstub_criteria c = criteria_of(2, 0);
    lstub_model *model = NULL;
    lstub_margin m;
    double v = -7;
    poison(m);
    assert_ok(lstub_model_create(board.stackup, &via, LOADED, NULL, &model, &err), err);
    assert_refused(lstub_model_margin(NULL, &s, &c, &m, &err), LSTUB_E_NULL, err, "model|null");
    assert_refused(lstub_model_margin(model, NULL, &c, &m, &err), LSTUB_E_NULL, err, "signal|null");
    assert_refused(lstub_model_margin(model, &s, NULL, &m, &err), LSTUB_E_NULL, err, "criteria|null");
    assert_refused(lstub_model_margin(model, &s, &c, NULL, &err), LSTUB_E_NULL, err, "null");
    assert_refused(lstub_signal_nyquist(&s, NULL, &err), LSTUB_E_NULL, err, "nyquist|null");
    assert_refused(lstub_signal_bit_rate(NULL, &v, &err), LSTUB_E_NULL, err, "signal|null");
    s.size = 9;
    assert_refused(lstub_model_margin(model, &s, &c, &m, &err), LSTUB_E_SIZE, err, "signal|size = 9");
    assert_untouched(m);
    lstub_model_destroy(model);
}
END_TEST

/* ---- batch ---------------------------------------------------------------------------------------- */

enum { BATCH = 24 };

typedef struct batch {
    lstub_via      via[BATCH];
    int32_t        connects[BATCH][2], side[BATCH];
    lstub_signal   signal[BATCH];
    lstub_criteria criteria[BATCH];
} batch;

static void make_batch(batch *b)
{
    for (uint64_t i = 0; i < BATCH; i++) {
        b->connects[i][0] = 0;
        b->connects[i][1] = copper(1 + (int)(6 * test_random(1, i)));
        b->via[i] = board_via(b->connects[i], 2);
        b->side[i] = LSTUB_SIDE_BOTTOM;
        b->signal[i] = signal_of(5e9 + 100e9 * test_random(2, i), i % 2 ? 4 : 2);
        b->criteria[i] = criteria_of(1 + 3 * test_random(3, i), test_random(4, i));
    }
    b->via[3].drill = NAN;
    b->signal[11].symbol_rate = -1;
}

static int32_t margins(const batch *b, size_t at, size_t n, lstub_margin *out, int32_t *status, lstub_error *e)
{
    for (size_t i = 0; i < n; i++)
        LSTUB_INIT(out[i]);
    return lstub_margin_batch(board.stackup, b->via + at, sizeof b->via[0], b->signal + at, sizeof b->signal[0], b->criteria + at,
                              sizeof b->criteria[0], n, LOADED, out, sizeof out[0], status, e);
}

static int32_t limits(const batch *b, size_t at, size_t n, lstub_stub_limit *out, int32_t *status, lstub_error *e)
{
    for (size_t i = 0; i < n; i++)
        LSTUB_INIT(out[i]);
    return lstub_longest_stub_batch(board.stackup, b->via + at, sizeof b->via[0], b->side + at, sizeof b->side[0], b->signal + at,
                                    sizeof b->signal[0], b->criteria + at, sizeof b->criteria[0], n, LOADED, out, sizeof out[0], status, e);
}

START_TEST(batches_are_their_parts)
{
    static batch b;
    lstub_margin all[BATCH], part[BATCH];
    lstub_stub_limit lall[BATCH], lpart[BATCH];
    int32_t status[BATCH], lstatus[BATCH], pstatus[BATCH], plstatus[BATCH];
    make_batch(&b);
    LSTUB_INIT(err);
    ck_assert_int_eq(margins(&b, 0, BATCH, all, status, &err), LSTUB_E_ARGUMENT);
    ck_assert(err.index == 3 && strstr(err.message, "item 3: drill = nan") != NULL);
    ck_assert_int_eq(limits(&b, 0, BATCH, lall, lstatus, &err), LSTUB_E_ARGUMENT);
    for (size_t at = 0, n; at < BATCH; at += n) {
        n = 1 + at % 5 < BATCH - at ? 1 + at % 5 : BATCH - at;
        margins(&b, at, n, part + at, pstatus + at, NULL);
        limits(&b, at, n, lpart + at, plstatus + at, NULL);
    }
    ck_assert_mem_eq(all, part, sizeof all);
    ck_assert_mem_eq(lall, lpart, sizeof lall);
    ck_assert_mem_eq(status, pstatus, sizeof status);
    ck_assert_mem_eq(lstatus, plstatus, sizeof lstatus);
    for (size_t i = 0; i < BATCH; i++) {
        int failed = i == 3 || i == 11;
        ck_assert_int_eq(status[i] < 0, failed);
        ck_assert_int_eq(lstatus[i] < 0, failed);
        ck_assert_int_eq(isnan(all[i].f1) && isnan(all[i].added_loss_db) && isnan(all[i].stub_length), failed);
        ck_assert_int_eq(isnan(lall[i].length) && isnan(lall[i].margin), failed);
        if (!failed) {
            lstub_margin m = margin(&b.via[i], b.signal[i], b.criteria[i]);
            ck_assert_mem_eq(&m, &all[i], sizeof m);
            lstub_stub_limit l = longest(&b.via[i], b.side[i], b.signal[i], b.criteria[i]);
            ck_assert_mem_eq(&l, &lall[i], sizeof l);
        }
    }
}
END_TEST

START_TEST(stride_0_is_the_same_for_all)
{
    static batch b;
    lstub_margin m[BATCH];
    lstub_stub_limit l[BATCH], lone[BATCH];
    int32_t status[BATCH];
    make_batch(&b);
    for (int i = 0; i < BATCH; i++) {
        LSTUB_INIT(m[i]);
        LSTUB_INIT(l[i]);
    }
    lstub_margin_batch(board.stackup, b.via, sizeof b.via[0], b.signal, 0, b.criteria, 0, BATCH, LOADED, m, sizeof m[0], status, NULL);
    for (int i = 0; i < BATCH; i++)
        if (i != 3)
            ck_assert(status[i] >= 0 && m[i].nyquist == 0.5 * b.signal[0].symbol_rate);
    lstub_longest_stub_batch(board.stackup, b.via, 0, b.side, 0, b.signal, sizeof b.signal[0], b.criteria, 0, BATCH, LOADED, l, sizeof l[0], status, NULL);
    for (int i = 0; i < BATCH; i++) {
        if (i == 11)
            continue;
        lone[i] = longest(&b.via[0], LSTUB_SIDE_BOTTOM, b.signal[i], b.criteria[0]);
        ck_assert_mem_eq(&lone[i], &l[i], sizeof l[0]);
    }
}
END_TEST

START_TEST(bad_batches)
{
    static batch b;
    lstub_margin m[BATCH];
    lstub_stub_limit l[BATCH];
    make_batch(&b);
    for (int i = 0; i < BATCH; i++) {
        poison(m[i]);
        poison(l[i]);
    }
    assert_refused(lstub_margin_batch(board.stackup, NULL, 0, b.signal, 0, b.criteria, 0, 2, NULL, m, sizeof m[0], NULL, &err), LSTUB_E_NULL, err, "vias|null");
    assert_refused(lstub_margin_batch(board.stackup, b.via, 8, b.signal, 0, b.criteria, 0, 2, NULL, m, sizeof m[0], NULL, &err), LSTUB_E_SIZE, err, "vias|stride = 8");
    assert_refused(lstub_margin_batch(board.stackup, b.via, 0, b.signal, 8, b.criteria, 0, 2, NULL, m, sizeof m[0], NULL, &err), LSTUB_E_SIZE, err, "signals|stride = 8");
    assert_refused(lstub_margin_batch(board.stackup, b.via, 0, b.signal, 0, b.criteria, 8, 2, NULL, m, sizeof m[0], NULL, &err), LSTUB_E_SIZE, err, "criteria|stride = 8");
    assert_refused(lstub_margin_batch(board.stackup, b.via, 0, b.signal, 0, b.criteria, 0, 2, NULL, m, 16, NULL, &err), LSTUB_E_SIZE, err, "out|stride = 16");
    assert_refused(lstub_longest_stub_batch(board.stackup, b.via, 8, b.side, 0, b.signal, 0, b.criteria, 0, 2, NULL, l, sizeof l[0], NULL, &err), LSTUB_E_SIZE, err, "vias|stride = 8");
    assert_refused(lstub_longest_stub_batch(board.stackup, b.via, 0, b.side, 1, b.signal, 0, b.criteria, 0, 2, NULL, l, sizeof l[0], NULL, &err), LSTUB_E_SIZE, err, "sides|stride = 1");
    assert_refused(lstub_longest_stub_batch(board.stackup, b.via, 0, NULL, 0, b.signal, 0, b.criteria, 0, 2, NULL, l, sizeof l[0], NULL, &err), LSTUB_E_NULL, err, "sides|null");
    for (int i = 0; i < BATCH; i++) {
        assert_untouched(m[i]);
        assert_untouched(l[i]);
        LSTUB_INIT(m[i]);
    }
    assert_refused(lstub_margin_batch(NULL, b.via, sizeof b.via[0], b.signal, 0, b.criteria, 0, 2, NULL, m, sizeof m[0], NULL, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_ok(lstub_margin_batch(board.stackup, NULL, 0, NULL, 0, NULL, 0, 0, NULL, NULL, 0, NULL, &err), err);
    assert_ok(lstub_longest_stub_batch(board.stackup, NULL, 0, NULL, 0, NULL, 0, NULL, 0, 0, NULL, NULL, 0, NULL, &err), err);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("criteria");
    TCase *truth = tcase_create("answers"), *input = tcase_create("input"), *batches = tcase_create("batch");
    tcase_add_checked_fixture(truth, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_add_checked_fixture(batches, setup, teardown);
    tcase_add_test(truth, signals);
    tcase_add_test(truth, margin_by_hand);
    tcase_add_test(truth, only_what_is_asked);
    tcase_add_test(truth, no_stub_no_limit);
    tcase_add_test(truth, notch_below_nyquist_is_no_pass);
    tcase_add_test(truth, notch_on_nyquist_is_no_pass);
    tcase_add_test(truth, faster_signal_smaller_margin);
    tcase_add_test(truth, stub_of_25_mil);
    tcase_add_test(truth, longest_stub_turned_back);
    tcase_add_test(truth, longest_stub_where_there_is_none);
    tcase_add_test(truth, highest_rate_turned_back);
    tcase_add_test(truth, highest_rate_without_limit);
    tcase_add_loop_test(input, bad_signals_and_criteria, 0, (int)COUNT(bad));
    tcase_add_test(input, bad_calls);
    tcase_add_test(batches, batches_are_their_parts);
    tcase_add_test(batches, stride_0_is_the_same_for_all);
    tcase_add_test(batches, bad_batches);
    suite_add_tcase(suite, truth);
    suite_add_tcase(suite, input);
    suite_add_tcase(suite, batches);
    return test_main(suite);
}
