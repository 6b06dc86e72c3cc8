/* Stackups: depths and means against sums by hand, and everything that is no stackup refused by name. */
#include "check_board.h"

static test_board  board;
static lstub_error err;

static void setup(void)
{
    LSTUB_INIT(err);
    board_layers(&board, "SPSP", 0.1e-3, 35e-6);
}

static void make(void) { assert_ok(board_create(&board, NULL, &err), err); }

static void teardown(void)
{
    lstub_stackup_destroy(board.stackup);
    board.stackup = NULL;
}

/* ---- what it says --------------------------------------------------------------------------------- */

START_TEST(layers_as_given)
{
    make();
    ck_assert_int_eq(lstub_stackup_count(board.stackup), 7);
    ck_assert_int_eq(lstub_stackup_copper_count(board.stackup), 4);
    memset(board.name, 'x', sizeof board.name);          /* what was given is no longer needed */
    board.dielectric.dk = NAN;
    for (int32_t i = 0; i < 7; i++) {
        lstub_layer layer;
        LSTUB_INIT(layer);
        assert_ok(lstub_stackup_layer(board.stackup, i, &layer, &err), err);
        ck_assert_int_eq(layer.name[0], i % 2 ? 'D' : 'C');
        ck_assert_int_eq(layer.kind, board.layer[i].kind);
        assert_close(layer.thickness, board.layer[i].thickness, 0, 0, "as given");
        assert_close(layer.dielectric->dk, 3.6, 0, 0, "as given; copper: the dielectric above, at the top below");
        ck_assert((layer.conductor != NULL) == (i % 2 == 0));
        if (layer.conductor != NULL)
            assert_close(layer.conductor->conductivity, 5.8e7, 0, 0, "the header's default");
    }
}
END_TEST

START_TEST(depths_by_hand)
{
    double top, bottom;
    make();
    for (int32_t i = 0; i < 7; i++) {
        double want = (i / 2) * 135e-6 + (i % 2) * 35e-6;
        assert_ok(lstub_stackup_depth(board.stackup, i, &top, &bottom, &err), err);
        assert_close(top, want, 1e-14, 1e-18, "sum by hand");
        assert_close(bottom, want + (i % 2 ? 100e-6 : 35e-6), 1e-14, 0, "sum by hand");
        assert_ok(lstub_stackup_depth(board.stackup, i, NULL, NULL, &err), err);
    }
}
END_TEST

/* Solder mask lies above depth 0. */
START_TEST(mask_has_negative_depth)
{
    double top, bottom;
    lstub_layer masked[9];
    memcpy(masked + 1, board.layer, 7 * sizeof masked[0]);
    masked[0] = masked[8] = board.layer[1];
    masked[0].name = "mask_top";
    masked[8].name = "mask_bottom";
    masked[0].thickness = masked[8].thickness = 20e-6;
    assert_ok(lstub_stackup_create(masked, 9, sizeof masked[0], NULL, &board.stackup, &err), err);
    assert_ok(lstub_stackup_depth(board.stackup, 0, &top, &bottom, &err), err);
    assert_close(top, -20e-6, 1e-14, 0, "the header's convention");
    assert_close(bottom, 0, 0, 0, "the header's convention");
    assert_ok(lstub_stackup_depth(board.stackup, 1, &top, NULL, &err), err);
    assert_close(top, 0, 0, 0, "depth 0 is the outer face of the top copper");
    assert_ok(lstub_stackup_depth(board.stackup, 8, NULL, &bottom, &err), err);
    assert_close(bottom, 460e-6, 1e-14, 0, "sum by hand");
}
END_TEST

START_TEST(found_by_name_and_number)
{
    int32_t index = -5;
    make();
    assert_ok(lstub_stackup_find(board.stackup, "C2", &index, &err), err);
    ck_assert_int_eq(index, 4);
    assert_ok(lstub_stackup_copper(board.stackup, 3, &index, &err), err);
    ck_assert_int_eq(index, 6);
    assert_refused(lstub_stackup_find(board.stackup, "C9", &index, &err), LSTUB_E_NONE, err, "name|C9");
    assert_refused(lstub_stackup_find(board.stackup, "c2", &index, &err), LSTUB_E_NONE, err, "name|c2");
    assert_refused(lstub_stackup_copper(board.stackup, 4, &index, &err), LSTUB_E_ARGUMENT, err, "number|4");
    assert_refused(lstub_stackup_copper(board.stackup, -1, &index, &err), LSTUB_E_ARGUMENT, err, "number|-1");
    ck_assert_int_eq(index, 6);
}
END_TEST

static void interval(double top, double bottom, lstub_interval *out)
{
    LSTUB_INIT(*out);
    assert_ok(lstub_stackup_interval(board.stackup, top, bottom, out, &err), err);
}

START_TEST(interval_by_hand)
{
    lstub_dielectric resin = board.dielectric;
    lstub_interval i;
    resin.dk = 3.0;
    resin.in_plane_ratio = 1.25;
    resin.loss_tangent = 0.01;
    board.layer[3].dielectric = &resin;                  /* D1 between C1 and C2; copper C2 takes its resin from it */
    board.layer[1].tol_plus = 8e-6;
    board.layer[1].tol_minus = 4e-6;
    board.layer[3].tol_plus = 6e-6;
    board.layer[3].tol_minus = 3e-6;
    make();
    /* Half of D0 (50 um, Dk 3.6), C1 (35 um, 3.6), all of D1 (100 um, 3.0, in-plane 3.75). */
    interval(85e-6, 270e-6, &i);
    assert_close(i.thickness, 185e-6, 1e-12, 0, "sum by hand");
    assert_close(i.dk_through_plane, 185 / (85 / 3.6 + 100 / 3.0), 1e-12, 0, "layers in series, by hand");
    assert_close(i.dk_in_plane, (85 * 3.6 + 100 * 3.75) / 185, 1e-12, 0, "layers side by side, by hand");
    assert_close(i.loss_tangent, (85 * 3.6 * 0.004 + 100 * 3.75 * 0.01) / (85 * 3.6 + 100 * 3.75), 1e-12, 0, "by hand");
    assert_close(i.tol_plus, 10e-6, 1e-12, 0, "half of one tolerance and the other, by hand");
    assert_close(i.tol_minus, 5e-6, 1e-12, 0, "half of one tolerance and the other, by hand");
    assert_close(i.tol_rss_plus, sqrt(16 + 36) * 1e-6, 1e-12, 0, "root of the sum of squares, by hand");
    assert_close(i.tol_rss_minus, sqrt(4 + 9) * 1e-6, 1e-12, 0, "root of the sum of squares, by hand");
}
END_TEST

/* Intervals side by side add up; the means lie between those of their parts, and a mean in series below one side by side. */
START_TEST(intervals_add_up)
{
    lstub_dielectric resin = board.dielectric;
    resin.dk = 3.1;
    board.layer[3].dielectric = &resin;
    board.layer[3].tol_plus = 7e-6;
    make();
    for (uint64_t n = 0; n < 300; n++) {
        double a = 440e-6 * test_random(1, n), b = 440e-6 * test_random(2, n), c = 440e-6 * test_random(3, n);
        double low = fmin(a, fmin(b, c)), high = fmax(a, fmax(b, c)), middle = a + b + c - low - high;
        lstub_interval u, l, all;
        if (middle - low < 1e-9 || high - middle < 1e-9)
            continue;
        interval(low, middle, &u);
        interval(middle, high, &l);
        interval(low, high, &all);
        assert_close(u.thickness + l.thickness, all.thickness, 1e-10, 0, "identity");
        assert_close(u.tol_plus + l.tol_plus, all.tol_plus, 1e-9, 1e-18, "identity: worst case adds");
        ck_assert(all.tol_rss_plus <= all.tol_plus * (1 + 1e-12));
        assert_close(u.thickness / u.dk_through_plane + l.thickness / l.dk_through_plane,
                     all.thickness / all.dk_through_plane, 1e-10, 0, "identity: series");
        assert_close(u.thickness * u.dk_in_plane + l.thickness * l.dk_in_plane, all.thickness * all.dk_in_plane, 1e-10, 0,
                     "identity: side by side");
        ck_assert(all.dk_through_plane <= all.dk_in_plane * (1 + 1e-12));
        ck_assert(all.dk_through_plane >= 3.1 - 1e-9 && all.dk_in_plane <= 3.6 + 1e-9);
    }
}
END_TEST

START_TEST(bad_intervals)
{
    lstub_interval i;
    poison(i);
    make();
    assert_refused(lstub_stackup_interval(board.stackup, -1e-3, 1e-4, &i, &err), LSTUB_E_ARGUMENT, err, "top|-0.001|m");
    assert_refused(lstub_stackup_interval(board.stackup, 0, 1e-2, &i, &err), LSTUB_E_ARGUMENT, err, "bottom|0.01|m");
    assert_refused(lstub_stackup_interval(board.stackup, NAN, 1e-4, &i, &err), LSTUB_E_ARGUMENT, err, "top|nan");
    assert_refused(lstub_stackup_interval(board.stackup, 0, INFINITY, &i, &err), LSTUB_E_ARGUMENT, err, "bottom|inf");
    assert_refused(lstub_stackup_interval(board.stackup, 2e-4, 2e-4, &i, &err), LSTUB_E_GEOMETRY, err, "bottom|0.0002|top");
    assert_refused(lstub_stackup_interval(board.stackup, 3e-4, 2e-4, &i, &err), LSTUB_E_GEOMETRY, err, "bottom|0.0002|0.0003");
    assert_refused(lstub_stackup_interval(NULL, 0, 1e-4, &i, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_stackup_interval(board.stackup, 0, 1e-4, NULL, &err), LSTUB_E_NULL, err, "null");
    assert_untouched(i);
    /* Depths a hair outside, from sums in another order: fine where something lies between, refused where nothing does. */
    LSTUB_INIT(i);
    assert_ok(lstub_stackup_interval(board.stackup, -1e-15, 1e-4, &i, &err), err);
    ck_assert(lstub_stackup_interval(board.stackup, -5e-13, -1e-13, &i, &err) < 0);
}
END_TEST

START_TEST(bad_questions)
{
    lstub_layer layer;
    double top = -7;
    int32_t index;
    poison(layer);
    make();
    assert_refused(lstub_stackup_layer(board.stackup, 7, &layer, &err), LSTUB_E_ARGUMENT, err, "index|7");
    assert_refused(lstub_stackup_layer(board.stackup, -1, &layer, &err), LSTUB_E_ARGUMENT, err, "index|-1");
    assert_refused(lstub_stackup_layer(NULL, 0, &layer, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_stackup_layer(board.stackup, 0, NULL, &err), LSTUB_E_NULL, err, "null");
    assert_refused(lstub_stackup_depth(board.stackup, 99, &top, NULL, &err), LSTUB_E_ARGUMENT, err, "index|99");
    assert_refused(lstub_stackup_depth(NULL, 0, &top, NULL, &err), LSTUB_E_NULL, err, "stackup|null");
    assert_refused(lstub_stackup_find(board.stackup, NULL, &index, &err), LSTUB_E_NULL, err, "name|null");
    assert_refused(lstub_stackup_find(board.stackup, "C0", NULL, &err), LSTUB_E_NULL, err, "index|null");
    assert_refused(lstub_stackup_copper(NULL, 0, &index, &err), LSTUB_E_NULL, err, "stackup|null");
    ck_assert_int_eq(lstub_stackup_count(NULL), 0);
    ck_assert_int_eq(lstub_stackup_copper_count(NULL), 0);
    ck_assert(top == -7);
    assert_untouched(layer);
    lstub_stackup_destroy(NULL);
}
END_TEST

/* ---- what is no stackup --------------------------------------------------------------------------- */

static void thickness_0(test_board *b) { b->layer[3].thickness = 0; }   /* copper may be a sheet */
static void thickness_negative(test_board *b) { b->layer[2].thickness = -1e-4; }
static void thickness_nan(test_board *b) { b->layer[3].thickness = NAN; }
static void thickness_huge(test_board *b) { b->layer[3].thickness = 0.11; }      /* as if millimetres were given */
static void thickness_infinite(test_board *b) { b->layer[3].thickness = INFINITY; }
static void tolerance_negative(test_board *b) { b->layer[1].tol_plus = -1e-6; }
static void tolerance_nan(test_board *b) { b->layer[1].tol_minus = NAN; }
static void tolerance_wide(test_board *b) { b->layer[1].tol_plus = 0.2e-3; }
static void tolerance_all(test_board *b) { b->layer[1].tol_minus = 0.1e-3; }
static void kind_0(test_board *b) { b->layer[1].kind = 0; }
static void kind_unknown(test_board *b) { b->layer[1].kind = 5; }
static void name_null(test_board *b) { b->layer[4].name = NULL; }
static void name_empty(test_board *b) { b->layer[4].name = ""; }
static void name_twice(test_board *b) { b->layer[4].name = "C0"; }
static void name_long(test_board *b)
{
    static char name[200];
    memset(name, 'n', sizeof name - 1);
    b->layer[4].name = name;
}
static void no_dielectric(test_board *b) { b->layer[5].dielectric = NULL; }
static void dielectric_dk(test_board *b) { b->dielectric.dk = 0.5; }
static void dielectric_size(test_board *b) { b->dielectric.size = 3; }
static lstub_conductor poor = {.size = sizeof poor, .conductivity = 1e3}, rough = {.size = sizeof rough, .roughness = 1e-3}, fine = {.size = sizeof fine};
static void conductor_poor(test_board *b) { b->layer[2].conductor = &poor; }
static void conductor_rough(test_board *b) { b->layer[2].conductor = &rough; }
static void conductor_in_dielectric(test_board *b) { b->layer[1].conductor = &fine; }
static void reserved(test_board *b) { b->layer[1].reserved = 1; }
static void layer_size(test_board *b) { b->layer[1].size = 7; }
static void copper_on_copper(test_board *b) { b->layer[3].kind = LSTUB_LAYER_SIGNAL; }
static void no_copper(test_board *b)
{
    for (size_t i = 0; i < b->count; i++) {
        b->layer[i].kind = LSTUB_LAYER_DIELECTRIC;
        b->layer[i].dielectric = &b->dielectric;
    }
}
static void no_layers(test_board *b) { b->count = 0; }
static void many_layers(test_board *b) { b->count = LSTUB_LAYERS_MAX + 1; }

static const struct {
    void      (*spoil)(test_board *b);
    int32_t     status;
    int64_t     index;
    const char *words;
} bad[] = {
    {thickness_0, LSTUB_E_ARGUMENT, 3, "layer 3 'D1'|thickness = 0 m|> 0|0.1"},
    {thickness_negative, LSTUB_E_ARGUMENT, 2, "layer 2 'C1'|thickness = -0.0001 m|>= 0|0.1 m"},
    {thickness_nan, LSTUB_E_ARGUMENT, 3, "layer 3 'D1'|thickness = nan"},
    {thickness_huge, LSTUB_E_ARGUMENT, 3, "layer 3 'D1'|thickness = 0.11 m|0.1 m"},
    {thickness_infinite, LSTUB_E_ARGUMENT, 3, "layer 3 'D1'|thickness = inf"},
    {tolerance_negative, LSTUB_E_ARGUMENT, 1, "layer 1 'D0'|tol_plus = -1e-06 m"},
    {tolerance_nan, LSTUB_E_ARGUMENT, 1, "layer 1 'D0'|tol_minus = nan"},
    {tolerance_wide, LSTUB_E_ARGUMENT, 1, "layer 1 'D0'|tol_plus = 0.0002 m|0.0001 m"},
    {tolerance_all, LSTUB_E_ARGUMENT, 1, "layer 1 'D0'|tol_minus = 0.0001 m|thickness"},
    {kind_0, LSTUB_E_ARGUMENT, 1, "layer 1 'D0'|kind = 0"},
    {kind_unknown, LSTUB_E_ARGUMENT, 1, "layer 1 'D0'|kind = 5"},
    {name_null, LSTUB_E_NULL, 4, "layer 4|name|null"},
    {name_empty, LSTUB_E_ARGUMENT, 4, "layer 4|name"},
    {name_twice, LSTUB_E_GEOMETRY, 4, "layer 4|name = 'C0'|layer 0"},
    {name_long, LSTUB_E_ARGUMENT, 4, "layer 4|name|127"},
    {no_dielectric, LSTUB_E_NULL, 5, "layer 5 'D2'|dielectric|null"},
    {dielectric_dk, LSTUB_E_ARGUMENT, 1, "layer 1 'D0'|dk = 0.5|1"},
    {dielectric_size, LSTUB_E_SIZE, 1, "layer 1 'D0'|dielectric|size = 3"},
    {conductor_poor, LSTUB_E_ARGUMENT, 2, "layer 2 'C1'|conductivity = 1000 S/m"},
    {conductor_rough, LSTUB_E_ARGUMENT, 2, "layer 2 'C1'|roughness = 0.001 m"},
    {conductor_in_dielectric, LSTUB_E_GEOMETRY, 1, "layer 1 'D0'|conductor"},
    {reserved, LSTUB_E_SIZE, 1, "layer 1 'D0'|reserved"},
    {layer_size, LSTUB_E_SIZE, 1, "layer 1|size = 7"},
    {copper_on_copper, LSTUB_E_GEOMETRY, 3, "layer 2 'C1'|layer 3 'D1'|dielectric"},
    {no_copper, LSTUB_E_GEOMETRY, -1, "layers|7|copper"},
    {no_layers, LSTUB_E_ARGUMENT, -1, "count = 0"},
    {many_layers, LSTUB_E_ARGUMENT, -1, "count = 257|256"},
};

START_TEST(bad_stackups)
{
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    bad[_i].spoil(&board);
    assert_refused(board_create(&board, &allocator, &err), bad[_i].status, err, bad[_i].words);
    ck_assert_int_eq(err.index, bad[_i].index);
    ck_assert_ptr_null(board.stackup);
    ck_assert_int_eq(memory.live, 0);
}
END_TEST

START_TEST(bad_calls)
{
    lstub_allocator none;
    LSTUB_INIT(none);
    assert_refused(lstub_stackup_create(NULL, 7, sizeof board.layer[0], NULL, &board.stackup, &err), LSTUB_E_NULL, err, "layers|null");
    assert_refused(lstub_stackup_create(board.layer, 7, sizeof board.layer[0], NULL, NULL, &err), LSTUB_E_NULL, err, "out|null");
    assert_refused(lstub_stackup_create(board.layer, 7, 0, NULL, &board.stackup, &err), LSTUB_E_SIZE, err, "layers|stride = 0");
    assert_refused(lstub_stackup_create(board.layer, 7, 12, NULL, &board.stackup, &err), LSTUB_E_SIZE, err, "layers|stride = 12");
    assert_refused(board_create(&board, &none, &err), LSTUB_E_NULL, err, "allocator|null");
    ck_assert_ptr_null(board.stackup);
}
END_TEST

START_TEST(every_allocation_fails_once)
{
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    long n = 0;
    do {
        int32_t status;
        LSTUB_INIT(err);
        memory.calls = 0;
        memory.fail_at = ++n;
        status = board_create(&board, &allocator, &err);
        if (status == LSTUB_OK)
            break;
        ck_assert_int_eq(status, LSTUB_E_MEMORY);
        ck_assert_int_eq(err.status, LSTUB_E_MEMORY);
        ck_assert_ptr_null(board.stackup);
        ck_assert_int_eq(memory.live, 0);
    } while (n < 100);
    ck_assert_int_gt(n, 1);
    ck_assert_int_lt(n, 100);
    lstub_stackup_destroy(board.stackup);
    board.stackup = NULL;
    ck_assert_int_eq(memory.live, 0);
}
END_TEST

/* Arrays of a longer struct, as a newer program has them. */
START_TEST(newer_layers_by_stride)
{
    struct newer {
        lstub_layer layer;
        double      added;
    } layers[7];
    for (int i = 0; i < 7; i++) {
        memset(&layers[i], 0, sizeof layers[i]);
        layers[i].layer = board.layer[i];
        layers[i].layer.size = sizeof layers[i];
    }
    assert_ok(lstub_stackup_create(&layers[0].layer, 7, sizeof layers[0], NULL, &board.stackup, &err), err);
    ck_assert_int_eq(lstub_stackup_count(board.stackup), 7);
    teardown();
    layers[3].added = 1.0;
    assert_refused(lstub_stackup_create(&layers[0].layer, 7, sizeof layers[0], NULL, &board.stackup, &err), LSTUB_E_NEWER, err, "layer 3");
}
END_TEST

START_TEST(one_sheet_of_copper)
{
    assert_ok(lstub_stackup_create(board.layer, 1, sizeof board.layer[0], NULL, &board.stackup, &err), err);
    ck_assert_int_eq(lstub_stackup_copper_count(board.stackup), 1);
}
END_TEST

START_TEST(as_many_layers_as_allowed)
{
    static lstub_layer layers[LSTUB_LAYERS_MAX];
    static char names[LSTUB_LAYERS_MAX][16];
    double bottom;
    for (int i = 0; i < LSTUB_LAYERS_MAX; i++) {
        layers[i] = board.layer[i % 2];
        snprintf(names[i], sizeof names[i], "L%d", i);
        layers[i].name = names[i];
    }
    assert_ok(lstub_stackup_create(layers, LSTUB_LAYERS_MAX, sizeof layers[0], NULL, &board.stackup, &err), err);
    assert_ok(lstub_stackup_depth(board.stackup, LSTUB_LAYERS_MAX - 1, NULL, &bottom, &err), err);
    assert_close(bottom, LSTUB_LAYERS_MAX / 2 * 135e-6, 1e-12, 0, "sum by hand");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("stackup");
    TCase *truth = tcase_create("answers"), *input = tcase_create("input");
    tcase_add_checked_fixture(truth, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_add_test(truth, layers_as_given);
    tcase_add_test(truth, depths_by_hand);
    tcase_add_test(truth, mask_has_negative_depth);
    tcase_add_test(truth, found_by_name_and_number);
    tcase_add_test(truth, interval_by_hand);
    tcase_add_test(truth, intervals_add_up);
    tcase_add_test(truth, newer_layers_by_stride);
    tcase_add_test(truth, one_sheet_of_copper);
    tcase_add_test(truth, as_many_layers_as_allowed);
    tcase_add_test(input, bad_intervals);
    tcase_add_test(input, bad_questions);
    tcase_add_loop_test(input, bad_stackups, 0, (int)COUNT(bad));
    tcase_add_test(input, bad_calls);
    tcase_add_test(input, every_allocation_fails_once);
    suite_add_tcase(suite, truth);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
