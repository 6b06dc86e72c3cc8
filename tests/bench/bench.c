/*
** What the library does in the benchmark; run.sh calls it and bench.py measures the references.
**
**     bench plan   VIAS REPEATS TABLE    plans an invented board of so many vias; TABLE gets inputs and results
**     bench cavityplan VIAS REPEATS TABLE  the same with the cavity model
**     bench notch  VIAS REPEATS          first notch of each, no two alike
**     bench zin    POINTS REPEATS        input impedance of one stub at so many frequencies
**     bench read   BOARD REPEATS         reads a board file
**     bench expat  BOARD REPEATS         the same file through zlib and expat alone, no handlers
**
** One via of ten cavities, AROUND it wall, ring, given4 or given2 (bench_cavity.c):
**     bench compile VIAS REPEATS         compiles it so many times with the cavity model
**     bench bytes  1 1                   memory of the compiled model
**     bench cavity POINTS REPEATS AROUND its input impedance at so many frequencies
**     bench ladder POINTS REPEATS        the same by the ladder
**     bench first  VIAS REPEATS AROUND   its first notch from scratch, so many times
**     bench second VIAS REPEATS WHAT     first notches of so many that differ from the one before in WHAT: antipad or depth
**
** Networks (bench_network.c):
**     bench transition POINTS REPEATS VIA:WAY  S-parameters of a whole via of ten cavities
**     bench touchstone FILE REPEATS      reads a Touchstone file
**
** Prints the seconds of each repeat, one a line; what bench.py checks goes to the error output.
*/
#define _POSIX_C_SOURCE 199309L
#include "bench.h"

#include <libstub_ipc2581.h>

#include <expat.h>
#include <string.h>
#include <time.h>
#include <zlib.h>

#define COPPER 20

double bench_now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

void bench_stop(const char *what)
{
    fprintf(stderr, "bench: %s\n", what);
    exit(1);
}

void *bench_room(size_t count, size_t bytes)
{
    void *memory = calloc(count, bytes);
    if (memory == NULL)
        bench_stop("out of memory");
    return memory;
}

/* 20 copper layers, every third a signal layer, 0.12 mm apart: bench.py has the same. */
static lstub_stackup *make_stackup(void)
{
    lstub_layer layers[2 * COPPER - 1];
    lstub_dielectric laminate;
    lstub_stackup *stackup;
    lstub_error err;
    char names[2 * COPPER - 1][8];
    LSTUB_INIT(err);
    LSTUB_INIT(laminate);
    laminate.dk = 3.6;
    laminate.in_plane_ratio = 1.15;
    laminate.loss_tangent = 0.005;
    for (int i = 0; i < 2 * COPPER - 1; i++) {
        int copper = i % 2 == 0, number = i / 2;
        int outer = number == 0 || number == COPPER - 1;
        LSTUB_INIT(layers[i]);
        snprintf(names[i], sizeof names[i], "%c%d", copper ? 'L' : 'D', number + 1);
        layers[i].name = names[i];
        layers[i].kind = !copper ? LSTUB_LAYER_DIELECTRIC : outer || number % 3 == 2 ? LSTUB_LAYER_SIGNAL : LSTUB_LAYER_PLANE;
        layers[i].thickness = copper ? 17e-6 : 0.12e-3;
        layers[i].tol_plus = layers[i].tol_minus = copper ? 0.0 : 6e-6;
        layers[i].dielectric = copper ? NULL : &laminate;
    }
    if (lstub_stackup_create(layers, 2 * COPPER - 1, sizeof layers[0], NULL, &stackup, &err) != LSTUB_OK)
        bench_stop(err.message);
    return stackup;
}

static uint32_t draw(uint32_t *state) { return (*state = *state * 1664525u + 1013904223u) >> 8; }

typedef struct board {
    lstub_via *via;
    lstub_job *job;
    int32_t  (*connects)[2];
    lstub_signal signal[6];
    lstub_criteria criteria;
} board;

/* alike: twenty antipads, so 720 different vias; otherwise each via has its own. Exit layers and rates are drawn. */
static void make_board(board *b, size_t vias, int alike)
{
    static const double rate[6] = {10.3125e9, 25.78125e9, 26.5625e9, 32e9, 53.125e9, 106.25e9};
    uint32_t state = 1;
    b->via = bench_room(vias, sizeof *b->via);
    b->job = bench_room(vias, sizeof *b->job);
    b->connects = bench_room(vias, sizeof *b->connects);
    LSTUB_INIT(b->criteria);
    b->criteria.notch_over_nyquist = 2.0;
    b->criteria.added_loss_db = 0.3;
    for (int i = 0; i < 6; i++) {
        LSTUB_INIT(b->signal[i]);
        b->signal[i].symbol_rate = rate[i];
    }
    for (size_t i = 0; i < vias; i++) {
        lstub_via *via = &b->via[i];
        LSTUB_INIT(*via);
        via->drill = 0.25e-3;
        via->pad_start = via->pad_inner = via->pad_end = 0.5e-3;
        via->antipad = 0.75e-3 + 5e-6 * (draw(&state) % 20) + (alike ? 0.0 : 1e-10 * (double)i);
        b->connects[i][1] = (int32_t)(2 * (2 + 3 * (draw(&state) % (COPPER / 3))));    /* a signal layer */
        via->connects = b->connects[i];
        via->connect_count = 2;
        via->return_kind = LSTUB_RETURN_VIAS;
        via->return_count = 4;
        via->return_distance = 1e-3;
        LSTUB_INIT(b->job[i]);
        b->job[i].via = via;
        b->job[i].signal = &b->signal[draw(&state) % 6];
        b->job[i].criteria = &b->criteria;
    }
}

static void write_table(const char *path, const board *b, const lstub_plan *plan, size_t vias)
{
    FILE *file = fopen(path, "w");
    if (file == NULL)
        bench_stop("cannot write the table");
    for (size_t i = 0; i < vias; i++) {
        lstub_decision d;
        LSTUB_INIT(d);
        lstub_plan_decision(plan, i, &d, NULL);
        fprintf(file, "%.17g %d %.17g %.17g %.17g %d %.17g %.17g\n", b->via[i].antipad, (int)b->connects[i][1],
                b->job[i].signal->symbol_rate, d.before.f1, d.before.added_loss_db, (int)d.action, d.bottom.depth_least,
                d.bottom.depth_most);
    }
    if (fclose(file) != 0)
        bench_stop("cannot write the table");
}

static void run_plan(size_t vias, int repeats, const char *table, int32_t fidelity)
{
    lstub_stackup *stackup = make_stackup();
    lstub_capability fab;
    lstub_model_options options;
    lstub_error err;
    board b;
    LSTUB_INIT(err);
    LSTUB_INIT(options);
    options.fidelity = fidelity;
    LSTUB_INIT(fab);
    fab.depth_tolerance = 50e-6;
    fab.cut_clearance = 50e-6;
    fab.residual_target = 0.15e-3;
    fab.bit_oversize = 0.2e-3;
    fab.wall_clearance = 0.1e-3;
    make_board(&b, vias, 1);
    for (int i = 0; i < repeats; i++) {
        lstub_plan *plan;
        double start = bench_now();
        if (lstub_plan_create(stackup, b.job, vias, sizeof b.job[0], &fab, &options, NULL, &plan, &err) < 0)
            bench_stop(err.message);
        printf("%.9f\n", bench_now() - start);
        if (i == 0)
            write_table(table, &b, plan, vias);
        lstub_plan_destroy(plan);
    }
    lstub_stackup_destroy(stackup);
}

static void run_notch(size_t vias, int repeats)
{
    lstub_stackup *stackup = make_stackup();
    double *f1 = bench_room(vias, sizeof *f1);
    lstub_model_options options;
    board b;
    LSTUB_INIT(options);
    options.fidelity = LSTUB_FIDELITY_LOADED;
    make_board(&b, vias, 0);
    for (int i = 0; i < repeats; i++) {
        double start = bench_now();
        if (lstub_first_notch_batch(stackup, b.via, vias, sizeof b.via[0], &options, f1, NULL, NULL, NULL, NULL) < 0)
            bench_stop("first_notch_batch failed");
        printf("%.9f\n", bench_now() - start);
    }
    lstub_stackup_destroy(stackup);
}

static void run_zin(size_t points, int repeats)
{
    lstub_stackup *stackup = make_stackup();
    double *freq = bench_room(points, sizeof *freq), *zin = bench_room(2 * points, sizeof *zin);
    lstub_model *model;
    lstub_model_options options;
    board b;
    LSTUB_INIT(options);
    options.fidelity = LSTUB_FIDELITY_LOADED;
    make_board(&b, 1, 1);
    b.connects[0][1] = 4;
    if (lstub_model_create(stackup, b.via, &options, NULL, &model, NULL) != LSTUB_OK)
        bench_stop("model_create failed");
    for (size_t i = 0; i < points; i++)
        freq[i] = 1e8 + 60e9 * (double)i / (double)points;
    for (int i = 0; i < repeats; i++) {
        double start = bench_now();
        if (lstub_model_zin(model, 0, freq, points, zin, NULL, NULL) < 0)
            bench_stop("model_zin failed");
        printf("%.9f\n", bench_now() - start);
    }
    lstub_model_destroy(model);
    lstub_stackup_destroy(stackup);
}

static void run_read(const char *path, int repeats)
{
    lstub_error err;
    LSTUB_INIT(err);
    for (int i = 0; i < repeats; i++) {
        lstub_board *read;
        double start = bench_now();
        if (lstub_board_load(path, NULL, NULL, NULL, &read, &err) < 0)
            bench_stop(err.message);
        printf("%.9f\n", bench_now() - start);
        lstub_board_destroy(read);
    }
}

static void run_expat(const char *path, int repeats)
{
    static char bytes[65536];
    for (int i = 0; i < repeats; i++) {
        double start = bench_now();
        gzFile file = gzopen(path, "rb");
        XML_Parser parser = XML_ParserCreate(NULL);
        int n;
        if (file == NULL || parser == NULL)
            bench_stop("cannot open the board");
        while ((n = gzread(file, bytes, sizeof bytes)) > 0)
            if (XML_Parse(parser, bytes, n, 0) != XML_STATUS_OK)
                bench_stop("not XML");
        if (n < 0 || XML_Parse(parser, bytes, 0, 1) != XML_STATUS_OK)
            bench_stop("not XML");
        XML_ParserFree(parser);
        gzclose(file);
        printf("%.9f\n", bench_now() - start);
    }
}

typedef void job(const bench_args *args);

static void plan(const bench_args *a) { run_plan(a->count, a->repeats, a->what, LSTUB_FIDELITY_LOADED); }
static void cavityplan(const bench_args *a) { run_plan(a->count, a->repeats, a->what, LSTUB_FIDELITY_CAVITY); }
static void notch(const bench_args *a) { run_notch(a->count, a->repeats); }
static void zin(const bench_args *a) { run_zin(a->count, a->repeats); }
static void read_board(const bench_args *a) { run_read(a->path, a->repeats); }
static void expat(const bench_args *a) { run_expat(a->path, a->repeats); }

static const struct { const char *name; job *run; int arguments; } JOBS[] = {
    {"plan", plan, 1}, {"cavityplan", cavityplan, 1}, {"notch", notch, 0}, {"zin", zin, 0}, {"read", read_board, 0},
    {"expat", expat, 0}, {"compile", bench_compile, 0}, {"bytes", bench_bytes, 0}, {"cavity", bench_cavity, 1},
    {"ladder", bench_ladder, 0}, {"first", bench_first, 1}, {"second", bench_second, 1}, {"transition", bench_transition, 1},
    {"touchstone", bench_touchstone, 0},
};

int main(int argc, char **argv)
{
    for (size_t i = 0; argc >= 4 && i < sizeof JOBS / sizeof JOBS[0]; i++) {
        bench_args args;
        if (strcmp(argv[1], JOBS[i].name) != 0 || argc != 4 + JOBS[i].arguments)
            continue;
        args.path = argv[2];
        args.count = (size_t)strtoul(argv[2], NULL, 10);
        args.repeats = atoi(argv[3]);
        args.what = argc > 4 ? argv[4] : NULL;
        JOBS[i].run(&args);
        return 0;
    }
    bench_stop("usage: bench JOB COUNT|FILE REPEATS [TABLE|AROUND|WHAT]; see the head of bench.c");
    return 1;
}
