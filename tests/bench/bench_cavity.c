/* Jobs on one via of ten cavities of 0.2 mm between planes, bare end, no pads: cavity_reference.py has the same. */
#include "bench.h"

#include <string.h>

#define CAVITIES 10
#define LAYERS   (2 * CAVITIES + 1)

typedef struct ten_cavities {
    lstub_stackup *stackup;
    lstub_via via;
    lstub_on_layer opening;
    int32_t top;
    lstub_model_options options;
} ten_cavities;

/* AROUND: a closed wall, four return vias evenly spread, four or two of them anywhere. */
static void set_around(lstub_via *via, const char *around)
{
    static const double given[8] = {0.9e-3, 0.1e-3, -1.0e-3, -0.3e-3, -0.2e-3, 0.95e-3, 0.3e-3, -0.85e-3};
    via->return_kind = LSTUB_RETURN_VIAS;
    via->return_distance = 0.9e-3;
    via->return_count = 4;
    if (strcmp(around, "wall") == 0) {
        via->return_kind = LSTUB_RETURN_WALL;
        via->return_count = 0;
    } else if (strncmp(around, "given", 5) == 0) {
        via->return_count = around[5] == '4' ? 4 : 2;
        via->return_distance = 0.0;
        via->return_xy = given;
    } else if (strcmp(around, "ring") != 0) {
        bench_stop("AROUND is wall, ring, given4 or given2");
    }
}

static void make_ten(ten_cavities *t, int32_t fidelity, const char *around)
{
    lstub_layer layers[LAYERS];
    lstub_dielectric laminate;
    char names[LAYERS][8];
    LSTUB_INIT(laminate);
    laminate.dk = 3.6;
    laminate.loss_tangent = 0.005;
    laminate.f_ref = 20e9;
    for (int i = 0; i < LAYERS; i++) {
        LSTUB_INIT(layers[i]);
        snprintf(names[i], sizeof names[i], "%c%d", i % 2 ? 'D' : 'L', i / 2);
        layers[i].name = names[i];
        layers[i].kind = i % 2 ? LSTUB_LAYER_DIELECTRIC : LSTUB_LAYER_PLANE;
        layers[i].thickness = i % 2 ? 0.2e-3 : 17e-6;
        layers[i].dielectric = i % 2 ? &laminate : NULL;
    }
    if (lstub_stackup_create(layers, LAYERS, sizeof layers[0], NULL, &t->stackup, NULL) != LSTUB_OK)
        bench_stop("stackup_create failed");
    LSTUB_INIT(t->options);
    t->options.fidelity = fidelity;
    LSTUB_INIT(t->via);
    t->top = 0;
    t->opening.layer = 0;
    t->opening.reserved = 0;
    t->opening.value = t->via.antipad = 0.8e-3;
    t->via.drill = 0.25e-3;
    t->via.connects = &t->top;
    t->via.connect_count = 1;
    t->via.antipads = &t->opening;
    t->via.antipad_count = 1;
    set_around(&t->via, around);
}

void bench_compile(const bench_args *args)
{
    ten_cavities t;
    make_ten(&t, LSTUB_FIDELITY_CAVITY, "wall");
    for (int i = 0; i < args->repeats; i++) {
        double start = bench_now();
        for (size_t k = 0; k < args->count; k++) {
            lstub_model *model;
            if (lstub_model_create(t.stackup, &t.via, &t.options, NULL, &model, NULL) != LSTUB_OK)
                bench_stop("model_create failed");
            lstub_model_destroy(model);
        }
        printf("%.9f\n", bench_now() - start);
    }
    lstub_stackup_destroy(t.stackup);
}

/* Bytes held, by an allocator that puts the size of each block in front of it. */
#define FRONT 64
static void *count_in(void *user, size_t bytes)
{
    char *block = malloc(bytes + FRONT);
    if (block == NULL)
        return NULL;
    *(size_t *)user += bytes;
    memcpy(block, &bytes, sizeof bytes);
    return block + FRONT;
}

static void count_out(void *user, void *memory)
{
    size_t bytes;
    if (memory == NULL)
        return;
    memcpy(&bytes, (char *)memory - FRONT, sizeof bytes);
    *(size_t *)user -= bytes;
    free((char *)memory - FRONT);
}

void bench_bytes(const bench_args *args)
{
    ten_cavities t;
    lstub_allocator counting;
    lstub_model *model;
    size_t held = 0;
    (void)args;
    make_ten(&t, LSTUB_FIDELITY_CAVITY, "wall");
    LSTUB_INIT(counting);
    counting.allocate = count_in;
    counting.release = count_out;
    counting.user = &held;
    if (lstub_model_create(t.stackup, &t.via, &t.options, &counting, &model, NULL) != LSTUB_OK)
        bench_stop("model_create failed");
    printf("%lu\n", (unsigned long)held);
    lstub_model_destroy(model);
    lstub_stackup_destroy(t.stackup);
}

/* One frequency and the impedance there go to the error output. */
static void impedance(int32_t fidelity, const char *around, size_t points, int repeats)
{
    ten_cavities t;
    lstub_model *model;
    double *freq = bench_room(points, sizeof *freq), *zin = bench_room(2 * points, sizeof *zin);
    make_ten(&t, fidelity, around);
    if (lstub_model_create(t.stackup, &t.via, &t.options, NULL, &model, NULL) != LSTUB_OK)
        bench_stop("model_create failed");
    for (size_t i = 0; i < points; i++)
        freq[i] = 1e8 + 60e9 * (double)i / (double)points;
    for (int i = 0; i < repeats; i++) {
        double start = bench_now();
        if (lstub_model_zin(model, 0, freq, points, zin, NULL, NULL) < 0)
            bench_stop("model_zin failed");
        printf("%.9f\n", bench_now() - start);
    }
    fprintf(stderr, "%.17g %.17g %.17g\n", freq[points / 8], zin[2 * (points / 8)], zin[2 * (points / 8) + 1]);
    free(freq);
    free(zin);
    lstub_model_destroy(model);
    lstub_stackup_destroy(t.stackup);
}

void bench_cavity(const bench_args *args) { impedance(LSTUB_FIDELITY_CAVITY, args->what, args->count, args->repeats); }
void bench_ladder(const bench_args *args) { impedance(LSTUB_FIDELITY_LADDER, "wall", args->count, args->repeats); }

/* The notch itself goes to the error output. */
void bench_first(const bench_args *args)
{
    ten_cavities t;
    double f1 = 0.0;
    make_ten(&t, LSTUB_FIDELITY_CAVITY, args->what);
    for (int i = 0; i < args->repeats; i++) {
        double start = bench_now();
        for (size_t k = 0; k < args->count; k++)
            if (lstub_first_notch_batch(t.stackup, &t.via, 1, sizeof t.via, &t.options, &f1, NULL, NULL, NULL, NULL) < 0)
                bench_stop("first_notch_batch failed");
        printf("%.9f\n", bench_now() - start);
    }
    fprintf(stderr, "%.17g\n", f1);
    lstub_stackup_destroy(t.stackup);
}

/* One call for all vias, so that the library may share what it can. The first two notches go to the error output. */
void bench_second(const bench_args *args)
{
    ten_cavities t;
    size_t n = args->count;
    lstub_via *via = bench_room(n, sizeof *via);
    lstub_on_layer *opening = bench_room(n, sizeof *opening);
    lstub_backdrill *drill = bench_room(n, sizeof *drill);
    double *f1 = bench_room(n, sizeof *f1);
    int depth = strcmp(args->what, "depth") == 0;
    if (!depth && strcmp(args->what, "antipad") != 0)
        bench_stop("WHAT is antipad or depth");
    make_ten(&t, LSTUB_FIDELITY_CAVITY, "wall");
    for (size_t i = 0; i < n; i++) {
        via[i] = t.via;
        opening[i] = t.opening;
        via[i].antipads = &opening[i];
        if (depth) {
            drill[i].side = LSTUB_SIDE_BOTTOM;
            drill[i].depth = 0.5e-3 + 1e-6 * (double)i;
            drill[i].diameter = 0.45e-3;
            via[i].backdrills = &drill[i];
            via[i].backdrill_count = 1;
        } else {
            opening[i].value = via[i].antipad = 0.8e-3 + 1e-6 * (double)i;
        }
    }
    for (int i = 0; i < args->repeats; i++) {
        double start = bench_now();
        if (lstub_first_notch_batch(t.stackup, via, n, sizeof via[0], &t.options, f1, NULL, NULL, NULL, NULL) < 0)
            bench_stop("first_notch_batch failed");
        printf("%.9f\n", bench_now() - start);
    }
    fprintf(stderr, "%.17g %.17g\n", f1[0], f1[n > 1]);
    free(via);
    free(opening);
    free(drill);
    free(f1);
    lstub_stackup_destroy(t.stackup);
}
