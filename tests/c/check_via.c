/* Vias: where the stubs are, against sums by hand, and every contradiction refused by name. */
#include "check_board.h"

/* Copper 35 um, dielectrics 0.1 mm: copper layer n lies from n * 135 um on; the board is 7 * 135 + 35 = 980 um thick. */
#define FACE(n) ((n) * 135e-6)
#define LAST 7

static test_board   board;
static lstub_error  err;
static const int32_t top_to_c2[] = {0, 4}, inner[] = {4, 8}, through[] = {0, 14}, one[] = {6};

static void setup(void)
{
    LSTUB_INIT(err);
    board_make(&board, "SPSPSPPS", 0.1e-3, 35e-6);
}

static void teardown(void)
{
    lstub_stackup_destroy(board.stackup);
    board.stackup = NULL;
}

static int32_t stubs_of(const lstub_via *via, lstub_stub stubs[2])
{
    int32_t count = -1;
    LSTUB_INIT(stubs[0]);
    LSTUB_INIT(stubs[1]);
    assert_ok(lstub_via_check(board.stackup, via, &err), err);
    assert_ok(lstub_via_stubs(board.stackup, via, stubs, sizeof stubs[0], &count, &err), err);
    return count;
}

static void assert_stub(const lstub_stub *s, int32_t side, int32_t exit, int32_t end, double top, double bottom)
{
    ck_assert_int_eq(s->side, side);
    ck_assert_int_eq(s->exit_layer, exit);
    ck_assert_int_eq(s->end_layer, end);
    assert_close(s->top, top, 1e-12, 1e-18, "sum by hand");
    assert_close(s->bottom, bottom, 1e-12, 1e-18, "sum by hand");
    assert_close(s->length, bottom - top, 1e-10, 0, "sum by hand");
}

START_TEST(stubs_by_hand)
{
    lstub_stub s[2];
    lstub_via via = board_via(top_to_c2, 2);
    ck_assert_int_eq(stubs_of(&via, s), 1);
    assert_stub(&s[0], LSTUB_SIDE_BOTTOM, 4, 14, FACE(2) + 35e-6, FACE(LAST) + 35e-6);
    via.connects = inner;
    ck_assert_int_eq(stubs_of(&via, s), 2);
    assert_stub(&s[0], LSTUB_SIDE_TOP, 4, 0, 0, FACE(2));
    assert_stub(&s[1], LSTUB_SIDE_BOTTOM, 8, 14, FACE(4) + 35e-6, FACE(LAST) + 35e-6);
    via.connects = through;
    ck_assert_int_eq(stubs_of(&via, s), 0);
    via.connects = one;
    via.connect_count = 1;
    ck_assert_int_eq(stubs_of(&via, s), 2);
    assert_stub(&s[0], LSTUB_SIDE_TOP, 6, 0, 0, FACE(3));
    assert_stub(&s[1], LSTUB_SIDE_BOTTOM, 6, 14, FACE(3) + 35e-6, FACE(LAST) + 35e-6);
}
END_TEST

START_TEST(order_of_connects_does_not_matter)
{
    static const int32_t orders[][3] = {{0, 4, 8}, {8, 0, 4}, {4, 8, 0}, {8, 4, 0}};
    lstub_stub s[2];
    for (size_t i = 0; i < COUNT(orders); i++) {
        lstub_via via = board_via(orders[i], 3);
        ck_assert_int_eq(stubs_of(&via, s), 1);
        assert_stub(&s[0], LSTUB_SIDE_BOTTOM, 8, 14, FACE(4) + 35e-6, FACE(LAST) + 35e-6);
    }
}
END_TEST

START_TEST(blind_and_buried)
{
    lstub_stub s[2];
    lstub_via via = board_via(top_to_c2, 2);
    via.start_layer = 0;
    via.end_layer = 4;
    ck_assert_int_eq(stubs_of(&via, s), 0);
    via.end_layer = 6;
    ck_assert_int_eq(stubs_of(&via, s), 1);
    assert_stub(&s[0], LSTUB_SIDE_BOTTOM, 4, 6, FACE(2) + 35e-6, FACE(3) + 35e-6);
    via.connects = inner;
    via.start_layer = 2;
    via.end_layer = 10;
    ck_assert_int_eq(stubs_of(&via, s), 2);
    assert_stub(&s[0], LSTUB_SIDE_TOP, 4, 2, FACE(1), FACE(2));
    assert_stub(&s[1], LSTUB_SIDE_BOTTOM, 8, 10, FACE(4) + 35e-6, FACE(5) + 35e-6);
}
END_TEST

START_TEST(backdrills_cut_the_barrel)
{
    lstub_backdrill drills[2] = {{LSTUB_SIDE_BOTTOM, 0, 300e-6, 0.45e-3}, {LSTUB_SIDE_TOP, 0, 200e-6, 0.45e-3}};
    lstub_stub s[2];
    lstub_via via = board_via(inner, 2);
    via.backdrills = drills;
    via.backdrill_count = 1;
    ck_assert_int_eq(stubs_of(&via, s), 2);
    assert_stub(&s[1], LSTUB_SIDE_BOTTOM, 8, -1, FACE(4) + 35e-6, 980e-6 - 300e-6);
    via.backdrill_count = 2;
    ck_assert_int_eq(stubs_of(&via, s), 2);
    assert_stub(&s[0], LSTUB_SIDE_TOP, 4, -1, 200e-6, FACE(2));
    drills[0].depth = 980e-6 - FACE(4) - 35e-6;          /* to the face of the layer itself: nothing is left */
    ck_assert_int_eq(stubs_of(&via, s), 1);
    ck_assert_int_eq(s[0].side, LSTUB_SIDE_TOP);
}
END_TEST

/* Depth counts from the outer face of the copper, whatever lies on it. */
START_TEST(solder_mask_moves_nothing)
{
    lstub_layer masked[BOARD_LAYERS];
    lstub_backdrill drill = {LSTUB_SIDE_BOTTOM, 0, 300e-6, 0.45e-3};
    int32_t shifted[] = {1, 5};
    lstub_stub s[2];
    lstub_via via = board_via(shifted, 2);
    memcpy(masked + 1, board.layer, board.count * sizeof masked[0]);
    masked[0] = masked[board.count + 1] = board.layer[1];
    masked[0].name = "mask_top";
    masked[board.count + 1].name = "mask_bottom";
    teardown();
    assert_ok(lstub_stackup_create(masked, board.count + 2, sizeof masked[0], NULL, &board.stackup, &err), err);
    via.backdrills = &drill;
    ck_assert_int_eq(stubs_of(&via, s), 1);
    assert_stub(&s[0], LSTUB_SIDE_BOTTOM, 5, 15, FACE(2) + 35e-6, 980e-6);
    via.backdrill_count = 1;
    ck_assert_int_eq(stubs_of(&via, s), 1);
    assert_stub(&s[0], LSTUB_SIDE_BOTTOM, 5, -1, FACE(2) + 35e-6, 980e-6 - 300e-6);
}
END_TEST

/* A board turned over has its stubs turned over. */
START_TEST(turned_over)
{
    test_board over = board;
    for (size_t i = 0; i < board.count; i++)
        over.layer[i] = board.layer[board.count - 1 - i];
    assert_ok(board_create(&over, NULL, &err), err);
    for (uint64_t n = 0; n < 200; n++) {
        int32_t a = copper((int)(8 * test_random(1, n))), b = copper((int)(8 * test_random(2, n))), count[2];
        int32_t here[2] = {a, b}, there[2] = {14 - a, 14 - b};
        lstub_via v = board_via(here, a == b ? 1 : 2), w = board_via(there, a == b ? 1 : 2);
        lstub_stub s[2], t[2];
        for (int i = 0; i < 2; i++) {
            LSTUB_INIT(s[i]);
            LSTUB_INIT(t[i]);
        }
        assert_ok(lstub_via_stubs(board.stackup, &v, s, sizeof s[0], &count[0], &err), err);
        assert_ok(lstub_via_stubs(over.stackup, &w, t, sizeof t[0], &count[1], &err), err);
        ck_assert_int_eq(count[0], count[1]);
        for (int i = 0; i < count[0]; i++) {
            ck_assert_int_eq(s[i].side, LSTUB_SIDE_BOTH - t[count[0] - 1 - i].side);
            assert_close(s[i].length, t[count[0] - 1 - i].length, 1e-10, 0, "identity: turned over");
        }
    }
    lstub_stackup_destroy(over.stackup);
}
END_TEST

START_TEST(tolerances_by_hand)
{
    lstub_backdrill drill = {LSTUB_SIDE_BOTTOM, 0, 400e-6, 0.45e-3};
    lstub_stub s[2];
    lstub_via via = board_via(top_to_c2, 2);
    teardown();
    for (size_t i = 1; i < board.count; i += 2) {        /* dielectrics: +10 um, -6 um */
        board.layer[i].tol_plus = 10e-6;
        board.layer[i].tol_minus = 6e-6;
    }
    assert_ok(board_create(&board, NULL, &err), err);
    ck_assert_int_eq(stubs_of(&via, s), 1);              /* five dielectrics below C2 */
    assert_close(s[0].length_max - s[0].length, 50e-6, 1e-9, 0, "five dielectrics, by hand");
    assert_close(s[0].length - s[0].length_min, 30e-6, 1e-9, 0, "five dielectrics, by hand");
    assert_close(s[0].length_rss_max - s[0].length, sqrt(5) * 10e-6, 1e-9, 0, "five dielectrics, by hand");
    assert_close(s[0].length - s[0].length_rss_min, sqrt(5) * 6e-6, 1e-9, 0, "five dielectrics, by hand");
    via.backdrills = &drill;
    via.backdrill_count = 1;
    ck_assert_int_eq(stubs_of(&via, s), 1);
    assert_close(s[0].length_max - s[0].length, 50e-6, 1e-9, 0, "the drill starts from the surface: all five still count");
    assert_close(s[0].length - s[0].length_min, 30e-6, 1e-9, 0, "the drill starts from the surface: all five still count");
}
END_TEST

START_TEST(strides_and_newer_stubs)
{
    struct newer {
        lstub_stub stub;
        double     added[3];
    } s[2];
    int32_t count = 0;
    lstub_via via = board_via(inner, 2);
    memset(s, POISON, sizeof s);
    s[0].stub.size = s[1].stub.size = sizeof s[0];
    assert_ok(lstub_via_stubs(board.stackup, &via, &s[0].stub, sizeof s[0], &count, &err), err);
    ck_assert_int_eq(count, 2);
    ck_assert(s[0].stub.side == LSTUB_SIDE_TOP && s[1].stub.side == LSTUB_SIDE_BOTTOM);
    ck_assert(s[0].added[0] == 0 && s[1].added[2] == 0 && s[1].stub.size == sizeof s[0]);
}
END_TEST

/* ---- what is no via ------------------------------------------------------------------------------ */

static lstub_on_layer on1, on2[2];
static lstub_backdrill cut[2];

static const lstub_on_layer *on(int32_t layer, double value)
{
    on1 = (lstub_on_layer){layer, 0, value};
    return &on1;
}

static void drill_to(lstub_via *v, int32_t side, double depth, double diameter)
{
    cut[0] = (lstub_backdrill){side, 0, depth, diameter};
    v->backdrills = cut;
    v->backdrill_count = 1;
}

static void connect(lstub_via *v, int32_t a, int32_t b)
{
    static int32_t list[2];
    list[0] = a;
    list[1] = b;
    v->connects = list;
    v->connect_count = 2;
}

#define SPOIL(name, ...) static void name(lstub_via *v) { __VA_ARGS__; }
SPOIL(drill_0, v->drill = 0)
SPOIL(drill_negative, v->drill = -0.25e-3)
SPOIL(drill_nan, v->drill = NAN)
SPOIL(drill_huge, v->drill = 0.25)
SPOIL(pad_nan, v->pad_inner = NAN)
SPOIL(pad_negative, v->pad_end = -1e-3)
SPOIL(pad_small, v->pad_start = 0.2e-3)
SPOIL(antipad_nan, v->antipad = NAN)
SPOIL(antipad_negative, v->antipad = -1e-3)
SPOIL(antipad_under_drill, v->antipad = 0.2e-3; v->pad_start = v->pad_inner = v->pad_end = 0)
SPOIL(antipad_is_drill, v->antipad = 0.25e-3; v->pad_start = v->pad_inner = v->pad_end = 0)
SPOIL(antipad_under_pad, v->antipad = 0.45e-3; v->nonfunctional_pads = LSTUB_PADS_KEPT)
SPOIL(antipad_none, v->antipad = 0)
SPOIL(antipad_entry_under_drill, v->antipads = on(6, 0.1e-3); v->antipad_count = 1)
SPOIL(pad_entry_over_antipad, v->pads = on(6, 0.9e-3); v->pad_count = 1)
SPOIL(pad_entry_small, v->pads = on(4, 0.1e-3); v->pad_count = 1)
SPOIL(pad_entry_nan, v->pads = on(4, NAN); v->pad_count = 1)
SPOIL(pad_entry_on_dielectric, v->pads = on(5, 0.5e-3); v->pad_count = 1)
SPOIL(pad_entry_nowhere, v->pads = on(99, 0.5e-3); v->pad_count = 1)
SPOIL(pad_entry_reserved, v->pads = on(4, 0.5e-3); on1.reserved = 1; v->pad_count = 1)
SPOIL(pad_entries_null, v->pad_count = 3)
SPOIL(antipad_entries_null, v->antipad_count = 3)
SPOIL(clear_entries_null, v->clear_count = 3)
SPOIL(pad_entry_twice, on2[0] = on2[1] = (lstub_on_layer){4, 0, 0.5e-3}; v->pads = on2; v->pad_count = 2)
SPOIL(clear_negative, v->clear = on(4, -1e-3); v->clear_count = 1)
SPOIL(span_upside_down, v->start_layer = 8; v->end_layer = 4)
SPOIL(span_of_one, v->start_layer = 4; v->end_layer = 4)
SPOIL(span_nowhere, v->start_layer = 0; v->end_layer = 99)
SPOIL(span_negative, v->start_layer = -2; v->end_layer = 4)
SPOIL(span_in_dielectric, v->start_layer = 0; v->end_layer = 5)
SPOIL(connects_null, v->connects = NULL)
SPOIL(connects_nothing, v->connect_count = 0)
SPOIL(connects_twice, connect(v, 4, 4))
SPOIL(connects_dielectric, connect(v, 0, 3))
SPOIL(connects_nowhere, connect(v, 0, 98))
SPOIL(connects_negative, connect(v, -1, 4))
SPOIL(exit_outside_the_span, v->start_layer = 0; v->end_layer = 6; connect(v, 0, 8))
SPOIL(returns_unknown, v->return_kind = 3)
SPOIL(returns_none_counted, v->return_count = 0)
SPOIL(returns_many, v->return_count = 1001)
SPOIL(returns_at_0, v->return_distance = 0)
SPOIL(returns_nan, v->return_distance = NAN)
SPOIL(returns_in_the_barrel, v->return_distance = 0.2e-3)
SPOIL(returns_that_touch, v->return_count = 40)
SPOIL(returns_drill, v->return_drill = -1e-4)
SPOIL(wall_in_the_barrel, v->return_kind = LSTUB_RETURN_WALL; v->return_distance = 0.1e-3)
SPOIL(wall_in_the_antipad, v->return_kind = LSTUB_RETURN_WALL; v->return_distance = 0.3e-3)
SPOIL(wall_in_a_pad, v->return_kind = LSTUB_RETURN_WALL; v->return_distance = 0.4e-3; v->pad_end = 1e-3)
SPOIL(pair_unknown, v->pair_kind = 7)
SPOIL(pair_at_0, v->pair_kind = LSTUB_PAIR_SHARED)
SPOIL(pair_nan, v->pair_kind = LSTUB_PAIR_SHARED; v->pair_pitch = NAN)
SPOIL(pair_overlaps, v->pair_kind = LSTUB_PAIR_SHARED; v->pair_pitch = 0.2e-3)
SPOIL(pair_antipads_overlap, v->pair_kind = LSTUB_PAIR_SEPARATE; v->pair_pitch = 0.7e-3)
SPOIL(pair_pads_overlap, v->pair_kind = LSTUB_PAIR_SHARED; v->pair_pitch = 0.45e-3)
SPOIL(pin_side_unknown, v->pin_side = 3)
SPOIL(pin_negative, v->pin_side = LSTUB_SIDE_TOP; v->pin_length = -1e-3)
SPOIL(pin_nan, v->pin_side = LSTUB_SIDE_TOP; v->pin_length = NAN)
SPOIL(pads_kept_unknown, v->nonfunctional_pads = 2)
SPOIL(via_reserved, v->reserved = 1)
SPOIL(drilled_nowhere, drill_to(v, 0, 1e-4, 0.4e-3))
SPOIL(drilled_both, drill_to(v, LSTUB_SIDE_BOTH, 1e-4, 0.4e-3))
SPOIL(drilled_0, drill_to(v, LSTUB_SIDE_BOTTOM, 0, 0.4e-3))
SPOIL(drilled_negative, drill_to(v, LSTUB_SIDE_BOTTOM, -1e-4, 0.4e-3))
SPOIL(drilled_nan, drill_to(v, LSTUB_SIDE_BOTTOM, NAN, 0.4e-3))
SPOIL(drilled_far, drill_to(v, LSTUB_SIDE_BOTTOM, 0.8e-3, 0.4e-3))
SPOIL(drilled_through, drill_to(v, LSTUB_SIDE_BOTTOM, 5e-3, 0.4e-3))
SPOIL(drilled_away_at_the_top, drill_to(v, LSTUB_SIDE_TOP, 1e-6, 0.4e-3))
SPOIL(bit_small, drill_to(v, LSTUB_SIDE_BOTTOM, 1e-4, 0.2e-3))
SPOIL(bit_nan, drill_to(v, LSTUB_SIDE_BOTTOM, 1e-4, NAN))
SPOIL(bit_huge, drill_to(v, LSTUB_SIDE_BOTTOM, 1e-4, 0.4))
SPOIL(drilled_twice, drill_to(v, LSTUB_SIDE_BOTTOM, 1e-4, 0.4e-3); cut[1] = cut[0]; v->backdrill_count = 2)
SPOIL(drilled_buried, v->start_layer = 0; v->end_layer = 8; drill_to(v, LSTUB_SIDE_BOTTOM, 1e-4, 0.4e-3))
SPOIL(drilled_reserved, drill_to(v, LSTUB_SIDE_BOTTOM, 1e-4, 0.4e-3); cut[0].reserved = 1)
SPOIL(drills_null, v->backdrill_count = 1)
SPOIL(via_size, v->size = 11)
SPOIL(via_short, v->size -= 8)

static const struct {
    void      (*spoil)(lstub_via *v);
    int32_t     status;
    const char *words;
} bad[] = {
    {drill_0, LSTUB_E_ARGUMENT, "drill = 0 m|> 0|0.01"},
    {drill_negative, LSTUB_E_ARGUMENT, "drill = -0.00025 m"},
    {drill_nan, LSTUB_E_ARGUMENT, "drill = nan"},
    {drill_huge, LSTUB_E_ARGUMENT, "drill = 0.25 m|0.01"},
    {pad_nan, LSTUB_E_ARGUMENT, "pad_inner = nan"},
    {pad_negative, LSTUB_E_ARGUMENT, "pad_end = -0.001 m"},
    {pad_small, LSTUB_E_GEOMETRY, "pad_start = 0.0002 m|drill = 0.00025 m"},
    {antipad_nan, LSTUB_E_ARGUMENT, "antipad = nan"},
    {antipad_negative, LSTUB_E_ARGUMENT, "antipad = -0.001 m"},
    {antipad_under_drill, LSTUB_E_GEOMETRY, "layer 2 'C1'|antipad = 0.0002 m|drill = 0.00025 m"},
    {antipad_is_drill, LSTUB_E_GEOMETRY, "layer 2 'C1'|antipad = 0.00025 m|drill"},
    {antipad_under_pad, LSTUB_E_GEOMETRY, "layer 2 'C1'|antipad = 0.00045 m|pad = 0.0005 m"},
    {antipad_none, LSTUB_E_GEOMETRY, "layer 2 'C1'|antipad = 0 m"},
    {antipad_entry_under_drill, LSTUB_E_GEOMETRY, "layer 6 'C3'|antipad = 0.0001 m|drill"},
    {pad_entry_over_antipad, LSTUB_E_GEOMETRY, "layer 6 'C3'|antipad = 0.00075 m|pad = 0.0009 m"},
    {pad_entry_small, LSTUB_E_GEOMETRY, "layer 4 'C2'|pad = 0.0001 m|drill"},
    {pad_entry_nan, LSTUB_E_ARGUMENT, "pads[0]|nan"},
    {pad_entry_on_dielectric, LSTUB_E_ARGUMENT, "pads[0]|5 'D2'|copper"},
    {pad_entry_nowhere, LSTUB_E_ARGUMENT, "pads[0]|99|15"},
    {pad_entry_reserved, LSTUB_E_SIZE, "pads[0]|reserved"},
    {pad_entries_null, LSTUB_E_NULL, "pads = null|3"},
    {antipad_entries_null, LSTUB_E_NULL, "antipads = null|3"},
    {clear_entries_null, LSTUB_E_NULL, "clear = null|3"},
    {pad_entry_twice, LSTUB_E_ARGUMENT, "pads[1]|4|twice"},
    {clear_negative, LSTUB_E_ARGUMENT, "clear[0]|-0.001 m"},
    {span_upside_down, LSTUB_E_GEOMETRY, "end_layer|4 'C2'|start_layer|8 'C4'"},
    {span_of_one, LSTUB_E_GEOMETRY, "end_layer|4 'C2'|start_layer"},
    {span_nowhere, LSTUB_E_ARGUMENT, "end_layer = 99|15"},
    {span_negative, LSTUB_E_ARGUMENT, "start_layer = -2"},
    {span_in_dielectric, LSTUB_E_ARGUMENT, "end_layer = 5 'D2'|copper"},
    {connects_null, LSTUB_E_ARGUMENT, "connects|0"},
    {connects_nothing, LSTUB_E_ARGUMENT, "connects|0"},
    {connects_twice, LSTUB_E_ARGUMENT, "connects[1]|4 'C2'|twice"},
    {connects_dielectric, LSTUB_E_ARGUMENT, "connects[1]|3 'D1'|copper"},
    {connects_nowhere, LSTUB_E_ARGUMENT, "connects[1]|98"},
    {connects_negative, LSTUB_E_ARGUMENT, "connects[0]|-1"},
    {exit_outside_the_span, LSTUB_E_GEOMETRY, "connects[1]|8 'C4'|span|0 'C0'|6 'C3'"},
    {returns_unknown, LSTUB_E_ARGUMENT, "return_kind = 3"},
    {returns_none_counted, LSTUB_E_ARGUMENT, "returns|count = 0|1000"},
    {returns_many, LSTUB_E_ARGUMENT, "return_count = 1001|1000"},
    {returns_at_0, LSTUB_E_ARGUMENT, "return_distance = 0 m"},
    {returns_nan, LSTUB_E_ARGUMENT, "return_distance = nan"},
    {returns_in_the_barrel, LSTUB_E_GEOMETRY, "returns|distance = 0.0002 m|0.00025 m"},
    {returns_that_touch, LSTUB_E_GEOMETRY, "returns|count = 40|0.00025 m"},
    {returns_drill, LSTUB_E_ARGUMENT, "return_drill = -0.0001 m"},
    {wall_in_the_barrel, LSTUB_E_GEOMETRY, "return_distance = 0.0001 m|0.00025 m"},
    {wall_in_the_antipad, LSTUB_E_GEOMETRY, "layer 2 'C1'|return_distance = 0.0003 m|0.00075 m"},
    {wall_in_a_pad, LSTUB_E_GEOMETRY, "layer 14 'C7'|return_distance = 0.0004 m|0.001 m"},
    {pair_unknown, LSTUB_E_ARGUMENT, "pair_kind = 7"},
    {pair_at_0, LSTUB_E_ARGUMENT, "pair_pitch = 0 m"},
    {pair_nan, LSTUB_E_ARGUMENT, "pair_pitch = nan"},
    {pair_overlaps, LSTUB_E_GEOMETRY, "pair_pitch = 0.0002 m|drill = 0.00025 m"},
    {pair_antipads_overlap, LSTUB_E_GEOMETRY, "pair_pitch = 0.0007 m|0.00075 m"},
    {pair_pads_overlap, LSTUB_E_GEOMETRY, "pair_pitch = 0.00045 m|0.0005 m"},
    {pin_side_unknown, LSTUB_E_ARGUMENT, "pin_side = 3"},
    {pin_negative, LSTUB_E_ARGUMENT, "pin_length = -0.001 m"},
    {pin_nan, LSTUB_E_ARGUMENT, "pin_length = nan"},
    {pads_kept_unknown, LSTUB_E_ARGUMENT, "nonfunctional_pads = 2"},
    {via_reserved, LSTUB_E_SIZE, "reserved = 1"},
    {drilled_nowhere, LSTUB_E_ARGUMENT, "backdrills[0]|side = 0"},
    {drilled_both, LSTUB_E_ARGUMENT, "backdrills[0]|side = 3"},
    {drilled_0, LSTUB_E_ARGUMENT, "backdrills[0]|depth = 0 m"},
    {drilled_negative, LSTUB_E_ARGUMENT, "backdrills[0]|depth = -0.0001 m"},
    {drilled_nan, LSTUB_E_ARGUMENT, "backdrills[0]|depth = nan"},
    {drilled_far, LSTUB_E_GEOMETRY, "backdrills[0]|depth = 0.0008 m|layer 4 'C2'|0.000675 m"},
    {drilled_through, LSTUB_E_GEOMETRY, "backdrills[0]|depth = 0.005 m"},
    {drilled_away_at_the_top, LSTUB_E_GEOMETRY, "backdrills[0]|depth = 1e-06 m|layer 0 'C0'"},
    {bit_small, LSTUB_E_ARGUMENT, "backdrills[0]|diameter = 0.0002 m|0.00025"},
    {bit_nan, LSTUB_E_ARGUMENT, "backdrills[0]|diameter = nan"},
    {bit_huge, LSTUB_E_ARGUMENT, "backdrills[0]|diameter = 0.4 m|0.01"},
    {drilled_twice, LSTUB_E_ARGUMENT, "backdrills[1]|side = 2|twice"},
    {drilled_buried, LSTUB_E_GEOMETRY, "backdrills[0]|side = 2|surface"},
    {drilled_reserved, LSTUB_E_SIZE, "backdrills[0]|reserved = 1"},
    {drills_null, LSTUB_E_NULL, "backdrills = null|1"},
    {via_size, LSTUB_E_SIZE, "via|size = 11"},
    {via_short, LSTUB_E_SIZE, "via|size"},
};

START_TEST(bad_vias)
{
    lstub_via via = board_via(top_to_c2, 2);
    lstub_stub s[2];
    int32_t count = -7;
    poison(s[0]);
    poison(s[1]);
    bad[_i].spoil(&via);
    assert_refused(lstub_via_check(board.stackup, &via, &err), bad[_i].status, err, bad[_i].words);
    assert_refused(lstub_via_stubs(board.stackup, &via, s, sizeof s[0], &count, &err), bad[_i].status, err, bad[_i].words);
    ck_assert_int_eq(count, -7);
    assert_untouched(s[0]);
    assert_untouched(s[1]);
}
END_TEST

START_TEST(bad_calls)
{
    struct {
        lstub_via via;
        double    added;
    } newer = {board_via(inner, 2), 0.0};
    lstub_via via = board_via(inner, 2);
    lstub_stub s[2];
    int32_t count = -7;
    poison(s[0]);
    s[1].size = 4;
    assert_refused(lstub_via_check(NULL, &via, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_via_check(board.stackup, NULL, &err), LSTUB_E_NULL, err, "via|null");
    assert_refused(lstub_via_stubs(board.stackup, &via, NULL, sizeof s[0], &count, &err), LSTUB_E_NULL, err, "stubs|null");
    assert_refused(lstub_via_stubs(board.stackup, &via, s, sizeof s[0], NULL, &err), LSTUB_E_NULL, err, "count|null");
    assert_refused(lstub_via_stubs(board.stackup, &via, s, 8, &count, &err), LSTUB_E_SIZE, err, "stubs|stride = 8");
    assert_refused(lstub_via_stubs(board.stackup, &via, s, sizeof s[0], &count, &err), LSTUB_E_SIZE, err, "stubs|size = 4");
    assert_untouched(s[0]);              /* also where only the second one is wrong */
    ck_assert_int_eq(count, -7);
    newer.via.size = sizeof newer;
    assert_ok(lstub_via_check(board.stackup, &newer.via, &err), err);
    newer.added = 1.0;
    assert_refused(lstub_via_check(board.stackup, &newer.via, &err), LSTUB_E_NEWER, err, "via");
}
END_TEST

/* Entries that say that there is nothing, and kinds of layers: fine. */
START_TEST(what_may_be)
{
    lstub_on_layer none[] = {{2, 0, 0}, {6, 0, 0}, {10, 0, 0}, {12, 0, 0}};
    lstub_via via = board_via(top_to_c2, 2);
    via.antipad = 0;
    via.antipads = none;
    via.antipad_count = 4;
    assert_ok(lstub_via_check(board.stackup, &via, &err), err);
    via.pads = none;
    via.pad_count = 4;
    via.pad_start = via.pad_inner = via.pad_end = 0;
    assert_ok(lstub_via_check(board.stackup, &via, &err), err);
    via.return_kind = LSTUB_RETURN_NONE;
    via.return_count = 0;
    via.return_distance = 0;
    assert_ok(lstub_via_check(board.stackup, &via, &err), err);
    via = board_via(top_to_c2, 2);
    via.pair_kind = LSTUB_PAIR_SHARED;
    via.pair_pitch = 0.7e-3;
    assert_ok(lstub_via_check(board.stackup, &via, &err), err);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("via");
    TCase *truth = tcase_create("stubs"), *input = tcase_create("input");
    tcase_add_checked_fixture(truth, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_add_test(truth, stubs_by_hand);
    tcase_add_test(truth, order_of_connects_does_not_matter);
    tcase_add_test(truth, blind_and_buried);
    tcase_add_test(truth, backdrills_cut_the_barrel);
    tcase_add_test(truth, solder_mask_moves_nothing);
    tcase_add_test(truth, turned_over);
    tcase_add_test(truth, tolerances_by_hand);
    tcase_add_test(truth, strides_and_newer_stubs);
    tcase_add_test(truth, what_may_be);
    tcase_add_loop_test(input, bad_vias, 0, (int)COUNT(bad));
    tcase_add_test(input, bad_calls);
    suite_add_tcase(suite, truth);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
