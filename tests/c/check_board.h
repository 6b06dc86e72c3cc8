/* A small board for the suites from stackup to plan: made of a word, "SPSP": copper layers top first. */
#ifndef CHECK_BOARD_H
#define CHECK_BOARD_H

#include "check_util.h"

#define BOARD_LAYERS 128

typedef struct test_board {
    lstub_layer      layer[BOARD_LAYERS];
    char             name[BOARD_LAYERS][8];
    lstub_dielectric dielectric;
    size_t           count;
    lstub_stackup   *stackup;
} test_board;

/* Copper layers "C0", "C1" ... of thickness t, kinds S, P or M; dielectrics "D0" ... of thickness h between them. */
static inline void board_layers(test_board *b, const char *kinds, double h, double t)
{
    memset(b, 0, sizeof *b);
    LSTUB_INIT(b->dielectric);
    b->dielectric.dk = 3.6;
    b->dielectric.loss_tangent = 0.004;
    for (size_t i = 0; kinds[i] != '\0'; i++) {
        for (int copper = i == 0; copper < 2; copper++) {
            lstub_layer *layer = &b->layer[b->count];
            char        *name = b->name[b->count++];
            ck_assert_uint_lt(b->count, BOARD_LAYERS);
            LSTUB_INIT(*layer);
            snprintf(name, sizeof b->name[0], "%c%u", copper ? 'C' : 'D', (unsigned)(copper ? i : i - 1) % 1000);
            layer->name = name;
            layer->thickness = copper ? t : h;
            layer->dielectric = copper ? NULL : &b->dielectric;
            layer->kind = !copper            ? LSTUB_LAYER_DIELECTRIC
                          : kinds[i] == 'S' ? LSTUB_LAYER_SIGNAL
                          : kinds[i] == 'P' ? LSTUB_LAYER_PLANE
                                            : LSTUB_LAYER_MIXED;
        }
    }
}

static inline int32_t board_create(test_board *b, const lstub_allocator *allocator, lstub_error *err)
{
    return lstub_stackup_create(b->layer, b->count, sizeof b->layer[0], allocator, &b->stackup, err);
}

static inline void board_make(test_board *b, const char *kinds, double h, double t)
{
    lstub_error err;
    board_layers(b, kinds, h, t);
    LSTUB_INIT(err);
    assert_ok(board_create(b, NULL, &err), err);
}

/* Index of copper layer number n in the layers above. */
static inline int32_t copper(int n) { return 2 * n; }

/* A through via, 0.25 mm in 0.75 mm antipads, four return vias at 1 mm, entering on the first copper layer. */
static inline lstub_via board_via(const int32_t *connects, size_t count)
{
    lstub_via via;
    LSTUB_INIT(via);
    via.drill = 0.25e-3;
    via.pad_start = via.pad_inner = via.pad_end = 0.5e-3;
    via.antipad = 0.75e-3;
    via.return_kind = LSTUB_RETURN_VIAS;
    via.return_count = 4;
    via.return_distance = 1e-3;
    via.connects = connects;
    via.connect_count = count;
    return via;
}

#endif
