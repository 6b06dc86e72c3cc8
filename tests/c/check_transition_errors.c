/* Transitions that cannot be: messages that name argument, value and index; memory that runs out; random ones. */
#include "check_transition.h"

typedef void spoil(stage *g);

static void good(stage *g)
{
    stage_begin(g, "PPSPSPPS", 0.2e-3, 17e-6, 0.01);
    coax(g);
    trace(g, 2)->width = 0.1e-3;
    trace(g, 4)->distance = 3e-3;
    stage_ring(g, 4, 0.9e-3);
}

static void good_pair(stage *g)
{
    good(g);
    stage_pair(g, LSTUB_PAIR_SEPARATE, 0.9e-3);
    stage_drill(g, LSTUB_SIDE_BOTTOM, 0.3e-3);
    stage_partner(g, LSTUB_SIDE_BOTTOM, 0.2e-3);
}

static const int32_t upside_down[] = {0, 14, 6, 6, 0, 14, 0, 14}, no_copper[] = {0, 14, 0, 5, 0, 14, 0, 14}, beyond[] = {0, 14, 0, 16, 0, 14, 0, 14};
static const double places[] = {0.9e-3, 0.0, -0.9e-3, 0.0, 0.0, 0.9e-3, 0.1e-3, 0.3e-3}, touching[] = {0.9e-3, 0.0, 1.0e-3, 0.0, 0.0, 0.9e-3, 0.0, -0.9e-3},
                    wild[] = {0.9e-3, 0.0, NAN, 0.0, 0.0, 0.9e-3, 0.0, -0.9e-3};

static void at_places(stage *g, const double *xy, const int32_t *spans)
{
    g->via.return_xy = xy;
    g->via.return_spans = spans;
}

static void kind(stage *g) { g->port[1].kind = 7; }
static void layer(stage *g) { g->port[2].layer = copper(5); }
static void dielectric_layer(stage *g) { g->port[2].layer = 3; }
static void twice(stage *g) { g->port[2].layer = g->port[1].layer; }
static void impedance(stage *g) { g->port[1].impedance = 0.5; }
static void no_impedance(stage *g) { g->port[1].impedance = 0.0; }
static void nan_impedance(stage *g) { g->port[2].impedance = NAN; }
static void dk(stage *g) { g->port[1].dk = 0.9; }
static void coax_dk(stage *g) { g->port[0].dk = 2000.0; }
static void tangent(stage *g) { g->port[1].loss_tangent = 0.6; }
static void width(stage *g) { g->port[1].width = 0.02; }
static void distance(stage *g) { g->port[2].distance = 0.2e-3; }
static void distance_inf(stage *g) { g->port[2].distance = INFINITY; }
static void z_ref(stage *g) { g->port[2].z_ref = -50.0; }
static void z_ref_coax(stage *g) { g->port[0].z_ref = 1e6; }
static void coax_below(stage *g) { g->port[1].kind = LSTUB_PORT_COAX; g->port[1].impedance = g->port[1].loss_tangent = g->port[1].width = 0.0; }
static void coax_impedance(stage *g) { g->port[0].impedance = 50.0; }
static void coax_without_mouth(stage *g) { g->via.antipad_count = 0; }
static void trace_in_a_plane(stage *g) { g->port[0].kind = LSTUB_PORT_TRACE; g->port[0].impedance = 50.0; }
static void both(stage *g)
{
    static lstub_trace t;
    LSTUB_INIT(t);
    g->port[1].trace = &t;
}
static void bad_trace(stage *g)
{
    static lstub_trace t;
    LSTUB_INIT(t);
    t.dielectric_below = &g->board.dielectric;
    t.width = -1.0;
    g->port[1].trace = &t;
    g->port[1].impedance = g->port[1].dk = g->port[1].loss_tangent = g->port[1].width = 0.0;
}
static void port_size(stage *g) { g->port[1].size = 3; }
static void no_ports(stage *g) { g->ports = 0; }
static void stubs(stage *g) { g->options.stubs = 2; }
static void metal(stage *g) { g->options.metal = -1; }
static void options_reserved(stage *g) { g->options.reserved = 1; }
static void options_size(stage *g) { g->options.size = 1; }
static void annuli(stage *g) { g->options.annuli = 13; }
static void annulus(stage *g) { g->options.annuli = 1; }
static void spans_alone(stage *g) { g->via.return_spans = beyond; }
static void spans_up(stage *g) { at_places(g, places, upside_down); g->via.antipad = 0.6e-3; g->via.return_drill = 0.1e-3; }
static void spans_copper(stage *g) { at_places(g, places, no_copper); }
static void spans_beyond(stage *g) { at_places(g, places, beyond); }
static void in_antipad(stage *g) { at_places(g, places, NULL); g->via.return_drill = 0.1e-3; }
static void vias_touch(stage *g) { at_places(g, touching, NULL); }
static void via_nowhere(stage *g) { at_places(g, wild, NULL); }
static void ring_in_antipad(stage *g) { g->via.return_distance = 0.3e-3; g->via.return_drill = 0.1e-3; }
static void own_alone(stage *g) { g->via.partner_own = 1; }
static void own(stage *g) { g->via.partner_own = 2; }
static void own_drills(stage *g) { g->via.partner_own = 0; }
static void partner_null(stage *g) { g->via.partner_backdrills = NULL; }
static void partner_count(stage *g) { g->via.partner_backdrill_count = 3; }
static void partner_cuts(stage *g) { g->partner[0].depth = 1.2e-3; }
static void partner_side(stage *g) { g->partner[0].side = 5; }
static void partner_reserved(stage *g) { g->partner[0].reserved = 5; }
static void partner_bit(stage *g) { g->partner[0].diameter = 0.1e-3; }
static void edge_kind(stage *g) { stage_edges(g, 2, 1e-2, 1e-2, 1e-2, 1e-2); }
static void edge_missing(stage *g) { stage_edges(g, 0, 1e-2, 1e-2, 0.0, 1e-2); }
static void edge_near(stage *g) { stage_edges(g, 0, 1e-2, 1e-2, 1e-2, 0.1e-3); }
static void edge_nan(stage *g) { stage_edges(g, 0, NAN, 1e-2, 1e-2, 1e-2); }
static void edge_and_wall(stage *g) { stage_wall(g, 2e-3); stage_edges(g, 0, 1e-2, 1e-2, 1e-2, 1e-2); }
static void edge_and_via(stage *g) { at_places(g, places, NULL); g->via.antipad = 0.5e-3; g->via.return_drill = 0.1e-3; stage_edges(g, 0, 1e-2, 0.93e-3, 1e-2, 1e-2); }
static void edge_and_ring(stage *g) { stage_edges(g, 0, 1e-2, 1e-2, 1e-2, 0.8e-3); }
static void edge_and_partner(stage *g) { g->via.return_kind = LSTUB_RETURN_NONE; stage_edges(g, 0, 1e-2, 0.95e-3, 1e-2, 1e-2); }
static void wall_and_pair(stage *g) { stage_wall(g, 3e-3); }

static const struct { spoil *how; int pair; int32_t status; int64_t index; const char *words; } spoiled[] = {
    {kind, 0, LSTUB_E_ARGUMENT, 1, "ports[1]|kind = 7|LSTUB_PORT_"},
    {layer, 0, LSTUB_E_GEOMETRY, 2, "ports[2]|layer|10|connects"},
    {dielectric_layer, 0, LSTUB_E_GEOMETRY, 2, "ports[2]|layer|3|connects"},
    {twice, 0, LSTUB_E_GEOMETRY, 2, "ports[2]|layer|4|has port 1"},
    {impedance, 0, LSTUB_E_ARGUMENT, 1, "ports[1]|impedance = 0.5 ohm|>= 1"},
    {no_impedance, 0, LSTUB_E_ARGUMENT, 1, "ports[1]|impedance = 0 ohm|>= 1"},
    {nan_impedance, 0, LSTUB_E_ARGUMENT, 2, "ports[2]|impedance = nan"},
    {dk, 0, LSTUB_E_ARGUMENT, 1, "ports[1]|dk = 0.9|>= 1"},
    {coax_dk, 0, LSTUB_E_ARGUMENT, 0, "ports[0]|dk = 2000|<= 1000"},
    {tangent, 0, LSTUB_E_ARGUMENT, 1, "ports[1]|loss_tangent = 0.6|<= 0.5"},
    {width, 0, LSTUB_E_ARGUMENT, 1, "ports[1]|width = 0.02 m|<= 0.01"},
    {distance, 0, LSTUB_E_ARGUMENT, 2, "ports[2]|distance = 0.0002 m|0.000225"},
    {distance_inf, 0, LSTUB_E_ARGUMENT, 2, "ports[2]|distance = inf m"},
    {z_ref, 0, LSTUB_E_ARGUMENT, 2, "ports[2]|z_ref = -50 ohm|>= 1"},
    {z_ref_coax, 0, LSTUB_E_ARGUMENT, 0, "ports[0]|z_ref = 1000000 ohm|<= 1000"},
    {coax_below, 0, LSTUB_E_UNSUPPORTED, 1, "ports[1]|layer|4|coaxial"},
    {coax_impedance, 0, LSTUB_E_GEOMETRY, 0, "ports[0]|LSTUB_PORT_COAX|impedance|must be 0"},
    {coax_without_mouth, 0, LSTUB_E_GEOMETRY, 0, "ports[0]|layer 0 'C0'|antipad"},
    {trace_in_a_plane, 0, LSTUB_E_UNSUPPORTED, 0, "ports[0]|layer 0 'C0'|within a plane|antipad"},
    {both, 0, LSTUB_E_GEOMETRY, 1, "ports[1]|trace|impedance|must be 0"},
    {bad_trace, 0, LSTUB_E_ARGUMENT, 1, "ports[1]|trace|width = -1 m"},
    {port_size, 0, LSTUB_E_SIZE, 1, "ports[1]|size"},
    {no_ports, 0, LSTUB_E_ARGUMENT, -1, "count = 0|>= 1"},
    {stubs, 0, LSTUB_E_ARGUMENT, -1, "stubs = 2|LSTUB_STUBS_"},
    {metal, 0, LSTUB_E_ARGUMENT, -1, "metal = -1|LSTUB_METAL_"},
    {options_reserved, 0, LSTUB_E_SIZE, -1, "reserved = 1|must be 0"},
    {options_size, 0, LSTUB_E_SIZE, -1, "options|size"},
    {annuli, 0, LSTUB_E_ARGUMENT, -1, "annuli = 13|12"},
    {annulus, 0, LSTUB_E_ARGUMENT, -1, "annuli = 1|2"},
    {spans_alone, 0, LSTUB_E_GEOMETRY, -1, "return_spans|return_xy"},
    {spans_up, 0, LSTUB_E_GEOMETRY, 1, "return_spans[3] = 6|below|6"},
    {spans_copper, 0, LSTUB_E_ARGUMENT, 1, "return_spans[3] = 5|copper"},
    {spans_beyond, 0, LSTUB_E_ARGUMENT, 1, "return_spans[3] = 16|copper|14"},
    {in_antipad, 0, LSTUB_E_GEOMETRY, 3, "return_xy[3] = 0.0001, 0.0003 m|inside the antipad|0.0007"},
    {vias_touch, 0, LSTUB_E_GEOMETRY, 1, "return_xy[1] = 0.001, 0 m|touches return via 0"},
    {via_nowhere, 0, LSTUB_E_ARGUMENT, 1, "return_xy[1] = nan, 0 m"},
    {ring_in_antipad, 0, LSTUB_E_GEOMETRY, 0, "return_distance = 0.0003 m|inside the antipad|0.0007"},
    {own_alone, 0, LSTUB_E_GEOMETRY, -1, "partner_own = 1|pair"},
    {own, 1, LSTUB_E_ARGUMENT, -1, "partner_own = 2|0 or 1"},
    {own_drills, 1, LSTUB_E_GEOMETRY, -1, "partner_backdrill_count = 1|partner_own"},
    {partner_null, 1, LSTUB_E_NULL, -1, "partner_backdrills = null|1"},
    {partner_count, 1, LSTUB_E_ARGUMENT, -1, "partner_backdrill_count = 3|<= 2"},
    {partner_cuts, 1, LSTUB_E_GEOMETRY, 0, "partner_backdrills[0]|depth = 0.0012 m|layer 8 'C4'"},
    {partner_side, 1, LSTUB_E_ARGUMENT, 0, "partner_backdrills[0]|side = 5"},
    {partner_reserved, 1, LSTUB_E_SIZE, 0, "partner_backdrills[0]|reserved = 5"},
    {partner_bit, 1, LSTUB_E_ARGUMENT, 0, "partner_backdrills[0]|diameter = 0.0001 m|0.00025"},
    {edge_kind, 0, LSTUB_E_ARGUMENT, -1, "edge_kind = 2|LSTUB_EDGE_"},
    {edge_missing, 0, LSTUB_E_ARGUMENT, 2, "edges[2]|0 m|> 0.000125"},
    {edge_near, 0, LSTUB_E_ARGUMENT, 3, "edges[3]|0.0001 m|> 0.000125"},
    {edge_nan, 0, LSTUB_E_ARGUMENT, 0, "edges[0]|nan"},
    {edge_and_wall, 0, LSTUB_E_GEOMETRY, -1, "edges|wall"},
    {edge_and_via, 0, LSTUB_E_GEOMETRY, -2, "edge"},
    {edge_and_ring, 0, LSTUB_E_GEOMETRY, -2, "edges"},
    {edge_and_partner, 1, LSTUB_E_GEOMETRY, -2, "edges[1]"},
    {wall_and_pair, 1, LSTUB_E_UNSUPPORTED, -1, "wall|pair"},
};

START_TEST(what_cannot_be_is_named)
{
    stage g;
    lstub_transition *t = (lstub_transition *)&g;
    (spoiled[_i].pair ? good_pair : good)(&g);
    lstub_transition_destroy(stage_make(&g));
    spoiled[_i].how(&g);
    int32_t status = stage_status(&g, NULL, &t);
    assert_refused_at(__FILE__, __LINE__, spoiled[_i].words, status, spoiled[_i].status, &err, spoiled[_i].words);
    if (spoiled[_i].index > -2)
        ck_assert_msg(err.index == spoiled[_i].index, "index %ld, want %ld: %s", (long)err.index, (long)spoiled[_i].index, err.message);
    ck_assert_ptr_eq(t, &g);                            /* outputs are untouched */
    stage_end(&g);
}
END_TEST

START_TEST(null_pointers_and_strides)
{
    stage g;
    lstub_transition *t = NULL;
    lstub_notch notch;
    double s[18], f = 1e9, z;
    size_t count = 77;
    good(&g);
    t = stage_make(&g);
    const lstub_stackup *board = g.board.stackup;
    lstub_transition *other = NULL;
    size_t size = sizeof g.port[0];
    LSTUB_INIT(notch);
    assert_refused(lstub_transition_create(NULL, &g.via, g.port, 3, size, NULL, NULL, &other, &err), LSTUB_E_NULL, err, "stackup");
    assert_refused(lstub_transition_create(board, NULL, g.port, 3, size, NULL, NULL, &other, &err), LSTUB_E_NULL, err, "via");
    assert_refused(lstub_transition_create(board, &g.via, NULL, 3, size, NULL, NULL, &other, &err), LSTUB_E_NULL, err, "ports");
    assert_refused(lstub_transition_create(board, &g.via, g.port, 3, size, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "out");
    assert_refused(lstub_transition_create(board, &g.via, g.port, 3, size - 8, NULL, NULL, &other, &err), LSTUB_E_SIZE, err, "ports|stride");
    assert_refused(lstub_transition_create(board, &g.via, g.port, 3, size + 1, NULL, NULL, &other, &err), LSTUB_E_SIZE, err, "ports|stride");
    assert_refused(lstub_transition_create(board, &g.via, g.port, 100, size, NULL, NULL, &other, &err), LSTUB_E_ARGUMENT, err, "count = 100");
    ck_assert_ptr_null(other);
    assert_refused(lstub_transition_s(NULL, &f, 1, s, NULL, &err), LSTUB_E_NULL, err, "transition");
    assert_refused(lstub_transition_s(t, NULL, 1, s, NULL, &err), LSTUB_E_NULL, err, "freq");
    assert_refused(lstub_transition_s(t, &f, 1, NULL, NULL, &err), LSTUB_E_NULL, err, "s");
    ck_assert_int_eq(lstub_transition_s(t, NULL, 0, NULL, NULL, &err), LSTUB_OK);
    assert_refused(lstub_transition_reference(NULL, 0, &z, &err), LSTUB_E_NULL, err, "transition");
    assert_refused(lstub_transition_reference(t, 0, NULL, &err), LSTUB_E_NULL, err, "z_ref");
    assert_refused(lstub_transition_reference(t, 3, &z, &err), LSTUB_E_ARGUMENT, err, "port = 3|< 3");
    assert_refused(lstub_transition_reference(t, -1, &z, &err), LSTUB_E_ARGUMENT, err, "port = -1|>= 0");
    assert_refused(lstub_transition_notches(NULL, 0, 1, 0, 1e10, &notch, 1, sizeof notch, &count, &err), LSTUB_E_NULL, err, "transition");
    assert_refused(lstub_transition_notches(t, 0, 1, 0, 1e10, NULL, 1, sizeof notch, &count, &err), LSTUB_E_NULL, err, "notches");
    assert_refused(lstub_transition_notches(t, 0, 1, 0, 1e10, &notch, 1, sizeof notch, NULL, &err), LSTUB_E_NULL, err, "count");
    assert_refused(lstub_transition_notches(t, 3, 1, 0, 1e10, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "mode = 3|LSTUB_MODE_");
    assert_refused(lstub_transition_notches(t, -1, 1, 0, 1e10, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "mode = -1");
    assert_refused(lstub_transition_notches(t, LSTUB_MODE_ODD, 1, 0, 1e10, &notch, 1, sizeof notch, &count, &err), LSTUB_E_NONE, err, "mode = 1|single");
    assert_refused(lstub_transition_notches(t, 0, 3, 0, 1e10, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "to = 3|< 3");
    assert_refused(lstub_transition_notches(t, 0, 1, -1, 1e10, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "from = -1");
    assert_refused(lstub_transition_notches(t, 0, 1, 0, 1e13, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "f_max = 1e+13 Hz");
    assert_refused(lstub_transition_notches(t, 0, 1, 0, NAN, &notch, 1, sizeof notch, &count, &err), LSTUB_E_ARGUMENT, err, "f_max = nan Hz");
    assert_refused(lstub_transition_notches(t, 0, 1, 0, 1e10, &notch, 1, 8, &count, &err), LSTUB_E_SIZE, err, "notches|stride");
    notch.size = 0;
    assert_refused(lstub_transition_notches(t, 0, 1, 0, 1e10, &notch, 1, sizeof notch, &count, &err), LSTUB_E_SIZE, err, "notches");
    ck_assert_uint_eq(count, 77);
    ck_assert_int_eq(lstub_transition_ports(NULL), 0);
    ck_assert_int_eq(lstub_transition_remarks(NULL), 0);
    for (int32_t bit = -1; bit < 64; bit++)
        ck_assert_ptr_nonnull(lstub_remark_text(bit));
    lstub_transition_destroy(NULL);
    lstub_transition_destroy(t);
    stage_end(&g);
}
END_TEST

START_TEST(frequencies_fail_one_by_one)
{
    static const double f[] = {1e9, 0.5e6, 2e9, NAN, -1.0, 120e9, 300e9, INFINITY, 1e6};
    static const int32_t want[] = {0, LSTUB_E_ARGUMENT, 0, LSTUB_E_ARGUMENT, LSTUB_E_ARGUMENT, LSTUB_W_RANGE, LSTUB_E_ARGUMENT, LSTUB_E_ARGUMENT, 0};
    stage g;
    double s[COUNT(f) * 18], one[18];
    int32_t status[COUNT(f)];
    good(&g);
    lstub_transition *t = stage_make(&g);
    assert_refused(lstub_transition_s(t, f, COUNT(f), s, status, &err), LSTUB_E_ARGUMENT, err, "freq = 500000 Hz|>= 1e+06");
    ck_assert_int_eq(err.index, 1);
    for (size_t i = 0; i < COUNT(f); i++) {
        ck_assert_int_eq(status[i], want[i]);
        if (want[i] >= 0) {
            s_at(t, f[i], one);
            ck_assert_double_eq(apart(one, s + 18 * i, 9), 0.0);
        } else
            for (int k = 0; k < 18; k++)
                ck_assert(isnan(s[18 * i + (size_t)k]));
    }
    ck_assert_int_eq(lstub_transition_s(t, f + 5, 1, s, NULL, &err), LSTUB_W_RANGE);
    ck_assert_ptr_nonnull(strstr(err.message, "1.1e+11"));
    lstub_transition_destroy(t);
    stage_end(&g);
}
END_TEST

START_TEST(more_notches_than_room)
{
    stage g;
    lstub_notch all[8], few[2];
    size_t count = 0, again = 0;
    good(&g);
    lstub_transition *t = stage_make(&g);
    for (int i = 0; i < 8; i++)
        LSTUB_INIT(all[i]);
    LSTUB_INIT(few[0]);
    LSTUB_INIT(few[1]);
    assert_ok(lstub_transition_notches(t, 0, 2, 0, 110e9, all, 8, sizeof all[0], &count, &err), err);
    ck_assert_uint_ge(count, 2);
    ck_assert_int_eq(lstub_transition_notches(t, 0, 2, 0, 110e9, few, 1, sizeof few[0], &again, &err), LSTUB_W_CAPACITY);
    ck_assert_uint_eq(again, count);
    ck_assert_double_eq(few[0].f, all[0].f);
    ck_assert_double_eq(few[1].f, 0.0);
    ck_assert_int_eq(lstub_transition_notches(t, 0, 2, 0, 110e9, NULL, 0, 0, &again, &err), LSTUB_W_CAPACITY);
    ck_assert_uint_eq(again, count);
    assert_ok(lstub_transition_notches(t, 0, 2, 0, 1e6, NULL, 0, 0, &again, &err), err);
    ck_assert_uint_eq(again, 0);
    lstub_transition_destroy(t);
    stage_end(&g);
}
END_TEST

START_TEST(memory_runs_out)
{
    stage g;
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    lstub_transition *t = NULL;
    (_i ? good_pair : good)(&g);
    g.via.partner_own = 0;
    g.via.partner_backdrill_count = 0;
    ck_assert_int_ge(stage_status(&g, &allocator, &t), 0);
    long calls = memory.calls;
    ck_assert_int_gt(memory.live, 0);
    lstub_transition_destroy(t);
    ck_assert_int_eq(memory.live, 0);
    for (long k = 1; k <= calls; k++) {
        allocator = test_allocator(&memory);
        memory.fail_at = k;
        t = NULL;
        ck_assert_int_eq(stage_status(&g, &allocator, &t), LSTUB_E_MEMORY);
        ck_assert_int_eq(err.status, LSTUB_E_MEMORY);
        ck_assert_ptr_null(t);
        ck_assert_msg(memory.live == 0, "%ld blocks left when call %ld of %ld fails", memory.live, k, calls);
    }
    stage_end(&g);
}
END_TEST

/* ---- random ones ------------------------------------------------------------------------------------------ */

static uint64_t seed, drawn;
static double any(double low, double high) { return low + (high - low) * test_random(seed, drawn++); }
static double far_apart(double low, double high) { return low * pow(high / low, any(0.0, 1.0)); }
static int one_of(int n) { return (int)any(0.0, (double)n); }
static int by_chance(double p) { return any(0.0, 1.0) < p; }

static void random_board(stage *g, int layers)
{
    char kinds[64];
    for (int i = 0; i < layers; i++)
        kinds[i] = by_chance(0.35) ? 'S' : by_chance(0.9) ? 'P' : 'M';
    kinds[0] = by_chance(0.5) ? 'S' : 'P';
    kinds[layers] = '\0';
    stage_begin(g, kinds, far_apart(0.05e-3, 0.5e-3), by_chance(0.3) ? 0.0 : far_apart(5e-6, 70e-6), by_chance(0.25) ? 0.0 : far_apart(1e-4, 0.1));
    g->board.dielectric.dk = far_apart(1.5, 10.0);
    g->board.dielectric.in_plane_ratio = any(0.9, 1.3);
    for (size_t i = 1; i < g->board.count && by_chance(0.9); i += 2)
        g->board.layer[i].thickness *= far_apart(0.4, 2.5);
    g->options.metal = one_of(2);
    g->options.stubs = by_chance(0.2);
    g->options.annuli = by_chance(0.7) ? 0 : 2 + one_of(5);
}

static void random_via(stage *g, int layers)
{
    double pad;
    g->via.drill = far_apart(0.1e-3, 0.5e-3);
    pad = g->via.drill * any(1.0, 2.2);
    g->via.antipad = pad * (1.0 + far_apart(0.05, 2.0));
    if (g->board.layer[0].kind == LSTUB_LAYER_PLANE)
        coax(g);
    else
        trace(g, 0);
    for (int i = 0; i < 2; i++) {
        int n = 1 + one_of(layers - 1);
        if (g->board.layer[copper(n)].kind == LSTUB_LAYER_SIGNAL && (g->ports < 2 || g->connects[1] != copper(n))) {
            lstub_port *p = trace(g, n);
            p->impedance = any(20.0, 120.0);
            p->width = by_chance(0.5) ? 0.0 : far_apart(0.05e-3, 0.4e-3);
            p->distance = by_chance(0.5) ? 0.0 : any(1e-3, 9e-3);
            p->z_ref = any(10.0, 150.0);
        }
    }
    g->via.pad_inner = pad;
    g->via.pad_start = g->via.pad_start > 0.0 ? pad : 0.0;
    g->via.pad_end = by_chance(0.7) ? pad : 0.0;
    g->via.nonfunctional_pads = one_of(2);
    if (by_chance(0.2))
        g->via.lid_distance = far_apart(0.05e-3, 5e-3);
    if (by_chance(0.4)) {
        stage_drill(g, by_chance(0.8) ? LSTUB_SIDE_BOTTOM : LSTUB_SIDE_TOP, far_apart(0.02e-3, 1e-3));
        g->drills[0].diameter = g->via.drill * any(1.0, 2.0);
        g->via.hole_dk = any(1.0, 5.0);
    }
    g->via.return_drill = by_chance(0.5) ? 0.0 : far_apart(0.1e-3, 0.4e-3);
}

static void random_surroundings(stage *g, int layers)
{
    if (by_chance(0.4)) {
        stage_pair(g, 1 + one_of(2), g->via.antipad * any(0.9, 2.0));
        if (by_chance(0.4)) {
            stage_partner(g, by_chance(0.8) ? LSTUB_SIDE_BOTTOM : LSTUB_SIDE_TOP, by_chance(0.5) ? 0.0 : far_apart(0.02e-3, 1e-3));
            g->partner[0].diameter = g->via.drill * any(1.0, 2.0);
        }
    } else if (by_chance(0.2)) {
        stage_wall(g, g->via.antipad * any(0.7, 5.0));
        return;
    }
    if (by_chance(0.4))
        stage_ring(g, 1 + one_of(9), g->via.antipad * any(0.7, 4.0));
    else
        for (int i = one_of(6); i > 0; i--) {
            double r = g->via.antipad * any(0.7, 5.0), phi = any(0.0, 2.0 * PI);
            int from = one_of(layers - 1);
            stage_place(g, r * cos(phi), r * sin(phi), by_chance(0.5) ? 0 : from, by_chance(0.5) ? layers - 1 : from + 1 + one_of(layers - 1 - from));
        }
    if (by_chance(0.2))
        stage_edges(g, one_of(2), far_apart(1e-3, 30e-3), far_apart(1e-3, 30e-3), far_apart(1e-3, 30e-3), far_apart(1e-3, 30e-3));
}

START_TEST(random_transitions)
{
    const char *many = getenv("LSTUB_TRANSITIONS");     /* how many; a few by default */
    const int count = many != NULL ? atoi(many) : 250;
    int made = 0;
    for (int n = 0; n < count; n++) {
        stage g;
        lstub_transition *t = NULL;
        int layers;
        seed = 20261201u + (uint64_t)n;
        drawn = 0;
        layers = by_chance(0.05) ? 2 + one_of(50) : 2 + one_of(9);
        random_board(&g, layers);
        random_via(&g, layers);
        random_surroundings(&g, layers);
        int32_t status = stage_status(&g, NULL, &t);
        if (status < 0) {
            ck_assert_msg(err.message[0] != '\0' && err.status == status, "%d: refused without a word", n);
            ck_assert_ptr_null(t);
            stage_end(&g);
            continue;
        }
        made++;
        int p = lstub_transition_ports(t);
        double f[6] = {1e6, far_apart(1e6, 200e9), far_apart(1e9, 110e9), 10e9, 67e9, 110e9}, s[6 * 2 * PORTS_MAX * PORTS_MAX];
        int32_t each[6];
        lstub_transition_s(t, f, 6, s, each, &err);
        for (int i = 0; i < 6; i++)
            for (int k = 0; k < 2 * p * p; k++)
                ck_assert_msg(each[i] < 0 ? isnan(s[i * 2 * p * p + k]) : isfinite(s[i * 2 * p * p + k]), "%d: status %d, %.9g at %.9g Hz", n, (int)each[i],
                              s[i * 2 * p * p + k], f[i]);
        for (int i = 0; i < 6; i++) {
            double sigma;
            if (each[i] < 0)
                continue;
            assert_ok(lstub_network_passivity(s + i * 2 * p * p, 1, p, &sigma, NULL, &err), err);
            ck_assert_msg(sigma <= 1.0 + 1e-6, "%d: gains %.3g at %.9g Hz", n, sigma - 1.0, f[i]);
        }
        lstub_transition_destroy(t);
        stage_end(&g);
    }
    ck_assert_msg(made > count / 5, "%d of %d could be made", made, count);
}
END_TEST

static Suite *errors_suite(void)
{
    Suite *suite = suite_create("transition_errors");
    TCase *c;

    c = tcase_create("arguments");
    tcase_set_timeout(c, 60.0);
    tcase_add_loop_test(c, what_cannot_be_is_named, 0, (int)COUNT(spoiled));
    tcase_add_test(c, null_pointers_and_strides);
    tcase_add_test(c, frequencies_fail_one_by_one);
    tcase_add_test(c, more_notches_than_room);
    suite_add_tcase(suite, c);

    c = tcase_create("memory");
    tcase_set_timeout(c, 120.0);
    tcase_add_loop_test(c, memory_runs_out, 0, 2);
    suite_add_tcase(suite, c);

    c = tcase_create("random");
    tcase_set_timeout(c, 3000.0);
    tcase_add_test(c, random_transitions);
    suite_add_tcase(suite, c);
    return suite;
}

int main(void) { return test_main(errors_suite()); }
