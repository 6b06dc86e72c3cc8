/* Transitions are reciprocal, lose power and gain none; without loss and with nowhere to radiate to they keep all. */
#include "check_transition.h"

typedef void build(stage *g, double loss);

static void plain(stage *g, double loss) { stage_begin(g, "PPSPPPS", 0.2e-3, 17e-6, loss); coax(g); trace(g, 2)->width = 0.1e-3; }
static void single_ring(stage *g, double loss) { plain(g, loss); stage_ring(g, 4, 0.9e-3); }
static void single_one(stage *g, double loss) { plain(g, loss); stage_ring(g, 1, 0.9e-3); }
static void single_none(stage *g, double loss) { plain(g, loss); }
static void single_wall(stage *g, double loss) { plain(g, loss); stage_wall(g, 2e-3); }
static void single_places(stage *g, double loss)
{
    plain(g, loss);
    stage_place(g, 0.8e-3, 0.3e-3, 0, 5);
    stage_place(g, -0.7e-3, 0.9e-3, 1, 3);
    stage_place(g, -0.2e-3, -1.4e-3, 3, 5);
}
static void three(stage *g, double loss)
{
    stage_begin(g, "PPSPSPPS", 0.2e-3, 17e-6, loss);
    coax(g);
    trace(g, 2)->distance = 3e-3;
    trace(g, 4)->width = 0.1e-3;
    stage_ring(g, 4, 0.9e-3);
}
static void two_in_one_space(stage *g, double loss)
{
    stage_begin(g, "PPSSPPS", 0.2e-3, 17e-6, loss);
    coax(g);
    trace(g, 2);
    trace(g, 3);
    stage_ring(g, 1, 0.9e-3);
}
static void drilled_twice(stage *g, double loss)
{
    stage_begin(g, "PSPSPSP", 0.2e-3, 17e-6, loss);
    trace(g, 3);
    trace(g, 1)->width = 0.1e-3;
    stage_ring(g, 3, 0.9e-3);
    stage_drill(g, LSTUB_SIDE_BOTTOM, 0.4e-3);
    stage_drill(g, LSTUB_SIDE_TOP, 0.1e-3);
}
static void free_top(stage *g, double loss)
{
    stage_begin(g, "PSPPSPP", 0.2e-3, 17e-6, loss);
    trace(g, 1);
    trace(g, 4)->width = 0.1e-3;
    stage_ring(g, 4, 0.9e-3);
}
static void lid(stage *g, double loss) { free_top(g, loss); g->via.lid_distance = 1e-3; }
static void lid_and_wall(stage *g, double loss) { lid(g, loss); stage_wall(g, 2e-3); }
static void microstrip_top(stage *g, double loss) { stage_begin(g, "SPPSPP", 0.2e-3, 17e-6, loss); trace(g, 0); trace(g, 3); stage_ring(g, 4, 0.9e-3); }
static void microstrip_both(stage *g, double loss) { stage_begin(g, "SPPPS", 0.2e-3, 17e-6, loss); trace(g, 0); trace(g, 4); stage_ring(g, 4, 0.9e-3); }
static void open_edges(stage *g, double loss) { plain(g, loss); stage_edges(g, LSTUB_EDGE_OPEN, 5e-3, 9e-3, 6e-3, 8e-3); }
static void shorted_edges(stage *g, double loss) { plain(g, loss); stage_edges(g, LSTUB_EDGE_SHORTED, 5e-3, 9e-3, 6e-3, 8e-3); }
static void edges_and_vias(stage *g, double loss) { open_edges(g, loss); stage_ring(g, 4, 0.9e-3); }
static void pair_round(stage *g, double loss) { plain(g, loss); stage_pair(g, LSTUB_PAIR_SEPARATE, 0.9e-3); }
static void pair_slot(stage *g, double loss) { plain(g, loss); stage_pair(g, LSTUB_PAIR_SHARED, 0.9e-3); }
static void pair_round_via(stage *g, double loss) { pair_round(g, loss); stage_place(g, -0.9e-3, 0.2e-3, 0, 5); }
static void pair_slot_ring(stage *g, double loss) { pair_slot(g, loss); stage_ring(g, 3, 0.9e-3); }
static void pair_unequal(stage *g, double loss) { pair_round_via(g, loss); stage_partner(g, LSTUB_SIDE_BOTTOM, 0.3e-3); }
static void pair_unequal_slot(stage *g, double loss) { pair_slot(g, loss); stage_drill(g, LSTUB_SIDE_BOTTOM, 0.3e-3); stage_partner(g, 0, 0.0); }
static void pair_unequal_top(stage *g, double loss)
{
    free_top(g, loss);
    stage_pair(g, LSTUB_PAIR_SEPARATE, 0.9e-3);
    g->port[0] = g->port[1];
    g->ports = 1;
    g->connects[0] = copper(4);
    g->via.connect_count = 1;
    stage_drill(g, LSTUB_SIDE_TOP, 0.3e-3);
    stage_partner(g, LSTUB_SIDE_TOP, 0.15e-3);
}
static void pair_edges(stage *g, double loss) { pair_round(g, loss); stage_edges(g, LSTUB_EDGE_OPEN, 6e-3, 8e-3, 6e-3, 8e-3); }
static void removed(stage *g, double loss) { three(g, loss); g->options.stubs = LSTUB_STUBS_REMOVED; }

static const struct { const char *what; build *make; int closed; } rows[] = {
    {"four vias", single_ring, 0}, {"one via", single_one, 0}, {"no via", single_none, 0}, {"a wall", single_wall, 0},
    {"vias of any span", single_places, 0}, {"three ports", three, 0}, {"two traces in one space", two_in_one_space, 0},
    {"drilled from both ends", drilled_twice, 0}, {"a free upper end", free_top, 0}, {"a lid", lid, 0}, {"a lid and a wall", lid_and_wall, 1},
    {"a microstrip on top", microstrip_top, 0}, {"microstrips on both sides", microstrip_both, 0}, {"open edges", open_edges, 0},
    {"shorted edges", shorted_edges, 0}, {"edges and vias", edges_and_vias, 0}, {"a pair", pair_round, 0}, {"a pair in a slot", pair_slot, 0},
    {"a pair with vias", pair_round_via, 0}, {"a pair in a slot in a ring", pair_slot_ring, 0}, {"an unequal pair", pair_unequal, 0},
    {"an unequal pair in a slot", pair_unequal_slot, 0}, {"a pair unequal at the top", pair_unequal_top, 0}, {"a pair between edges", pair_edges, 0},
    {"stubs removed", removed, 0},
};

START_TEST(no_power_from_nothing)
{
    static const double losses[] = {0.0, 0.005, 0.05};
    for (size_t l = 0; l < COUNT(losses); l++)
        for (int metal = LSTUB_METAL_LOSSY; metal <= LSTUB_METAL_PERFECT; metal++) {
            stage g;
            rows[_i].make(&g, losses[l]);
            g.options.metal = metal;
            lstub_transition *t = stage_make(&g);
            int p = lstub_transition_ports(t), kept = rows[_i].closed && l == 0 && metal == LSTUB_METAL_PERFECT;
            for (double f = 10e6; f <= 110e9; f = f < 2e9 ? 3.0 * f : f + 1.7e9) {
                double s[2 * PORTS_MAX * PORTS_MAX], sigma, difference, power = 0.0;
                s_at(t, f, s);
                assert_ok(lstub_network_passivity(s, 1, p, &sigma, NULL, &err), err);
                assert_ok(lstub_network_reciprocity(s, 1, p, &difference, NULL, &err), err);
                ck_assert_msg(sigma <= 1.0 + 1e-9, "%s, tan d %g, metal %d, %.4g GHz: gains %.3g", rows[_i].what, losses[l], metal, 1e-9 * f, sigma - 1.0);
                ck_assert_msg(difference <= 1e-10, "%s, tan d %g, metal %d, %.4g GHz: not reciprocal by %.3g", rows[_i].what, losses[l], metal,
                              1e-9 * f, difference);
                for (int i = 0; i < p * p; i++)
                    power += s[2 * i] * s[2 * i] + s[2 * i + 1] * s[2 * i + 1];
                if (kept)
                    assert_close(power, p, 0.0, 1e-10, "nothing is lost: S is unitary, the squares of its p rows are 1");
            }
            lstub_transition_destroy(t);
            stage_end(&g);
        }
}
END_TEST

static Suite *passive_suite(void)
{
    Suite *suite = suite_create("passive");
    TCase *c = tcase_create("power");
    tcase_set_timeout(c, 120.0);
    tcase_add_loop_test(c, no_power_from_nothing, 0, (int)COUNT(rows));
    suite_add_tcase(suite, c);
    return suite;
}

int main(void) { return test_main(passive_suite()); }
