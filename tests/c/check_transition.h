/* What the suites of transitions share: a board, a via and its ports in one piece, and S in one call. */
#ifndef CHECK_TRANSITION_H
#define CHECK_TRANSITION_H

#include "check_board.h"

#define C0 299792458.0
#define PI 3.14159265358979323846
#define PORTS_MAX 8

static lstub_error err;

typedef struct stage {
    test_board      board;
    lstub_via       via;
    lstub_port      port[4];
    size_t          ports;
    lstub_transition_options options;
    int32_t         connects[4], spans[32];
    lstub_on_layer  antipads[4];
    double          xy[32];
    lstub_backdrill drills[2], partner[2];
} stage;

/* Copper layers as in board_layers; a via of 0.25 mm in antipads of 0.7 mm with pads of 0.45 mm, perfect metal, no ports. */
static inline void stage_begin(stage *s, const char *kinds, double h, double t, double loss)
{
    memset(s, 0, sizeof *s);
    board_layers(&s->board, kinds, h, t);
    s->board.dielectric.dk = 3.5;
    s->board.dielectric.loss_tangent = loss;
    s->board.dielectric.f_ref = 20e9;
    LSTUB_INIT(s->via);
    s->via.drill = 0.25e-3;
    s->via.antipad = 0.7e-3;
    s->via.pad_start = s->via.pad_inner = s->via.pad_end = 0.45e-3;
    s->via.connects = s->connects;
    s->via.antipads = s->antipads;
    LSTUB_INIT(s->options);
    s->options.metal = LSTUB_METAL_PERFECT;
    LSTUB_INIT(err);
}

static inline void stage_layers(stage *s, const double *h)      /* heights of the dielectrics, downwards */
{
    for (size_t i = 1; i < s->board.count; i += 2)
        s->board.layer[i].thickness = *h++;
}

static inline lstub_port *stage_port(stage *s, int n, int32_t kind)
{
    lstub_port *p = &s->port[s->ports++];
    LSTUB_INIT(*p);
    p->kind = kind;
    p->layer = copper(n);
    s->connects[s->via.connect_count++] = copper(n);
    if (kind == LSTUB_PORT_COAX) {
        s->antipads[s->via.antipad_count].layer = copper(n);
        s->antipads[s->via.antipad_count++].value = s->via.antipad;
        s->via.pad_start = 0.0;
    } else {
        p->impedance = 50.0;
        p->dk = 3.5;
        p->loss_tangent = s->board.dielectric.loss_tangent;
    }
    return p;
}

static inline lstub_port *coax(stage *s) { return stage_port(s, 0, LSTUB_PORT_COAX); }
static inline lstub_port *trace(stage *s, int n) { return stage_port(s, n, LSTUB_PORT_TRACE); }

static inline void stage_ring(stage *s, int32_t count, double distance)
{
    s->via.return_kind = LSTUB_RETURN_VIAS;
    s->via.return_count = count;
    s->via.return_distance = distance;
}

static inline void stage_wall(stage *s, double distance)
{
    s->via.return_kind = LSTUB_RETURN_WALL;
    s->via.return_distance = distance;
}

static inline void stage_place(stage *s, double x, double y, int from, int to)  /* copper numbers */
{
    int32_t i = s->via.return_count++;
    s->via.return_kind = LSTUB_RETURN_VIAS;
    s->via.return_xy = s->xy;
    s->xy[2 * i] = x;
    s->xy[2 * i + 1] = y;
    s->via.return_spans = s->spans;
    s->spans[2 * i] = copper(from);
    s->spans[2 * i + 1] = copper(to);
}

static inline void stage_pair(stage *s, int32_t kind, double pitch)
{
    s->via.pair_kind = kind;
    s->via.pair_pitch = pitch;
}

static inline void stage_edges(stage *s, int32_t kind, double left, double right, double front, double back)
{
    const double edges[4] = {left, right, front, back};
    s->via.edge_kind = kind;
    memcpy(s->via.edges, edges, sizeof edges);
}

static inline void stage_drill(stage *s, int32_t side, double depth)
{
    const lstub_backdrill drill = {side, 0, depth, 0.4e-3};
    s->drills[s->via.backdrill_count++] = drill;
    s->via.backdrills = s->drills;
}

static inline void stage_partner(stage *s, int32_t side, double depth)    /* depth 0: its own, without a drill */
{
    const lstub_backdrill drill = {side, 0, depth, 0.4e-3};
    s->via.partner_own = 1;
    if (depth == 0.0)
        return;
    s->partner[s->via.partner_backdrill_count++] = drill;
    s->via.partner_backdrills = s->partner;
}

static inline int32_t stage_status(stage *s, const lstub_allocator *allocator, lstub_transition **out)
{
    int32_t status;
    if (s->board.stackup == NULL)
        assert_ok(board_create(&s->board, NULL, &err), err);
    LSTUB_INIT(err);
    status = lstub_transition_create(s->board.stackup, &s->via, s->port, s->ports, sizeof s->port[0], &s->options, allocator, out, &err);
    return status;
}

static inline lstub_transition *stage_make(stage *s)
{
    lstub_transition *t = NULL;
    int32_t status = stage_status(s, NULL, &t);
    ck_assert_msg(status >= 0, "%s", err.message);
    return t;
}

static inline void stage_end(stage *s)
{
    lstub_stackup_destroy(s->board.stackup);
    s->board.stackup = NULL;
}

/* One frequency, with as many ports as there are; outside the stated range is fine here. */
static inline void s_at(const lstub_transition *t, double f, double *s)
{
    LSTUB_INIT(err);
    int32_t status = lstub_transition_s(t, &f, 1, s, NULL, &err);
    ck_assert_msg(status >= 0, "%.9g Hz: %s", f, err.message);
}

/* The S of a stage at one frequency; returns the number of ports. */
static inline int stage_s(stage *g, double f, double *s)
{
    lstub_transition *t = stage_make(g);
    int p = lstub_transition_ports(t);
    s_at(t, f, s);
    lstub_transition_destroy(t);
    return p;
}

/* Largest difference of two sets of n complex numbers. */
static inline double apart(const double *a, const double *b, int n)
{
    double worst = 0.0;
    for (int i = 0; i < n; i++)
        worst = fmax(worst, hypot(a[2 * i] - b[2 * i], a[2 * i + 1] - b[2 * i + 1]));
    return worst;
}

/* How far two stages are apart over the band. */
static inline double stages_apart(stage *a, stage *b, double f_max)
{
    lstub_transition *ta = stage_make(a), *tb = stage_make(b);
    int p = lstub_transition_ports(ta);
    double worst = 0.0, x[2 * PORTS_MAX * PORTS_MAX], y[2 * PORTS_MAX * PORTS_MAX];
    ck_assert_int_eq(p, lstub_transition_ports(tb));
    for (double f = 1e8; f <= f_max; f *= 1.3) {
        s_at(ta, f, x);
        s_at(tb, f, y);
        worst = fmax(worst, apart(x, y, p * p));
    }
    lstub_transition_destroy(ta);
    lstub_transition_destroy(tb);
    return worst;
}

static inline double magnitude(const double *s, int index) { return hypot(s[2 * index], s[2 * index + 1]); }

#endif
