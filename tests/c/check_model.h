/* What the suites of models share: a board of eight copper layers, and one-line questions. */
#ifndef CHECK_MODEL_H
#define CHECK_MODEL_H

#include "check_board.h"

#define C0   299792458.0
#define PI   3.14159265358979323846
#define MU0  (4e-7 * PI)
#define EPS0 (1.0 / (MU0 * C0 * C0))

static test_board   board;
static lstub_error  err;
static const int32_t to_c1[] = {0, 2}, to_c3[] = {0, 6}, inner[] = {4, 8}, through[] = {0, 14};

static inline void setup_loss(double loss)
{
    LSTUB_INIT(err);
    board_layers(&board, "SPSPSPPS", 0.2e-3, 35e-6);
    board.dielectric.loss_tangent = loss;
    assert_ok(board_create(&board, NULL, &err), err);
}

static inline void setup(void) { setup_loss(0.004); }
static inline void setup_lossless(void) { setup_loss(0.0); }

static inline void teardown(void)
{
    lstub_stackup_destroy(board.stackup);
    board.stackup = NULL;
}

static inline lstub_model_options options(int32_t fidelity)
{
    lstub_model_options o;
    LSTUB_INIT(o);
    o.fidelity = fidelity;
    return o;
}

static inline lstub_model *model_on(const lstub_stackup *stackup, const lstub_via *via, int32_t fidelity)
{
    lstub_model *model = NULL;
    lstub_model_options o = options(fidelity);
    assert_ok(lstub_model_create(stackup, via, &o, NULL, &model, &err), err);
    return model;
}

static inline lstub_stub_line line_of(const lstub_model *model, int32_t stub)
{
    lstub_stub_line line;
    LSTUB_INIT(line);
    assert_ok(lstub_model_line(model, stub, &line, &err), err);
    return line;
}

static inline double length_of(const lstub_model *model, int32_t stub)
{
    lstub_stub s;
    LSTUB_INIT(s);
    assert_ok(lstub_model_stub(model, stub, &s, &err), err);
    return s.length;
}

/* Number of notches of one stub, the first of them in the array; more than it holds and outside the stated range are fine
** here. */
static inline size_t notches_of(const lstub_model *model, int32_t stub, double f_max, lstub_notch *notches, size_t capacity)
{
    size_t count = 0;
    for (size_t i = 0; i < capacity; i++)
        LSTUB_INIT(notches[i]);
    LSTUB_INIT(err);
    int32_t status = lstub_model_notches(model, stub, f_max, notches, capacity, sizeof notches[0], &count, &err);
    ck_assert_msg(status >= 0, "%s", err.message);
    return count;
}

static inline double first_notch(const lstub_stackup *stackup, const lstub_via *via, int32_t fidelity)
{
    double f1 = NAN;
    lstub_model_options o = options(fidelity);
    LSTUB_INIT(err);
    int32_t status = lstub_first_notch_batch(stackup, via, 1, sizeof *via, &o, &f1, NULL, NULL, NULL, &err);
    ck_assert_msg(status >= 0, "%s", err.message);
    return f1;
}

typedef struct complex_value {
    double re, im;
} complex_value;

static inline complex_value zin_of(const lstub_model *model, int32_t stub, double f)
{
    complex_value z = {NAN, NAN};
    ck_assert_int_ge(lstub_model_zin(model, stub, &f, 1, &z.re, NULL, &err), 0);
    return z;
}

static inline double loss_of(const lstub_model *model, int32_t stub, double f)
{
    double loss = NAN;
    ck_assert_int_ge(lstub_model_added_loss(model, stub, &f, 1, &loss, NULL, &err), 0);
    return loss;
}

static inline lstub_via random_via(uint64_t seed, uint64_t n, int32_t connects[2])
{
    lstub_via via = board_via(connects, 2);
    int a = (int)(8 * test_random(seed, 10 * n)), b = (int)(8 * test_random(seed, 10 * n + 1));
    connects[0] = copper(a);
    connects[1] = copper(b == a ? (a + 1) % 8 : b);
    via.drill = 1e-4 * (1.5 + 2 * test_random(seed, 10 * n + 2));
    via.antipad = via.drill + 2e-4 + 4e-4 * test_random(seed, 10 * n + 3);
    via.pad_start = via.pad_inner = via.pad_end = via.drill + 1e-4;
    via.nonfunctional_pads = test_random(seed, 10 * n + 4) < 0.5;
    via.return_distance = via.antipad * (0.7 + test_random(seed, 10 * n + 5));
    via.return_kind = (int32_t)(3 * test_random(seed, 10 * n + 6));
    via.return_count = 1 + (int32_t)(4 * test_random(seed, 10 * n + 7));
    return via;
}

#endif
