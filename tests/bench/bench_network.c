/* Jobs on networks: a whole via of ten cavities with its lines, of which media_reference.py has the circuit, and Touchstone. */
#include "bench.h"

#include <math.h>
#include <string.h>

/*
** Ten cavities of 0.2 mm, or no two alike and about 0.2 mm; the fifth holds a signal layer halfway, where the trace leaves.
** Coax above, bare end below.
*/
#define LAYERS 23
#define TRACE  10           /* index of the signal layer */

static lstub_stackup *make_stackup(int alike)
{
    lstub_layer layers[LAYERS];
    lstub_dielectric laminate;
    lstub_stackup *stackup;
    char names[LAYERS][8];
    LSTUB_INIT(laminate);
    laminate.dk = 3.6;
    laminate.loss_tangent = 0.005;
    laminate.f_ref = 20e9;
    for (int i = 0; i < LAYERS; i++) {
        int copper = i % 2 == 0, split = i == TRACE - 1 || i == TRACE + 1, cavity = i < TRACE ? i / 2 : i / 2 - 1;
        double height = split ? 91.5e-6 : alike ? 0.2e-3 : 0.2e-3 + 4e-6 * (cavity - 4);
        LSTUB_INIT(layers[i]);
        snprintf(names[i], sizeof names[i], "%c%d", copper ? 'L' : 'D', i / 2);
        layers[i].name = names[i];
        layers[i].kind = !copper ? LSTUB_LAYER_DIELECTRIC : i == TRACE ? LSTUB_LAYER_SIGNAL : LSTUB_LAYER_PLANE;
        layers[i].thickness = copper ? 17e-6 : height;
        layers[i].dielectric = copper ? NULL : &laminate;
    }
    if (lstub_stackup_create(layers, LAYERS, sizeof layers[0], NULL, &stackup, NULL) != LSTUB_OK)
        bench_stop("stackup_create failed");
    return stackup;
}

/* First local minimum of |a + b|, Hz; both lie 2 p p doubles a frequency apart. b may be null. */
static double first_minimum(const double *freq, size_t n, const double *a, const double *b, double sign, size_t step)
{
    double last = HUGE_VAL;
    for (size_t i = 0; i < n; i++) {
        double re = a[i * step], im = a[i * step + 1], size;
        if (b != NULL) {
            re += sign * b[i * step];
            im += sign * b[i * step + 1];
        }
        size = hypot(re, im);
        if (size > last && last < 0.7)
            return freq[i - 1];
        last = size;
    }
    bench_stop("no notch");
    return 0.0;
}

/*
** VIA:WAY, the via single, unlike (no two cavities alike) or pair; the way model (compiled and evaluated, both within the time),
** table (the same with a table for sweeps) or read (from a table that is there already). First notches go to the error output,
** of a pair in odd and in even mode.
*/
void bench_transition(const bench_args *args)
{
    static const double beside[6] = {0.0, 0.9e-3, 0.0, -0.9e-3, -0.9e-3, 0.0};
    static const int32_t connects[2] = {0, TRACE};
    const char *way = strchr(args->what, ':');
    int pair = strncmp(args->what, "pair:", 5) == 0, unlike = strncmp(args->what, "unlike:", 7) == 0, p = pair ? 4 : 2, read;
    lstub_stackup *stackup = make_stackup(!unlike);
    lstub_on_layer opening = {0, 0, 0.7e-3};
    lstub_via via;
    lstub_port port[2];
    lstub_transition_options options;
    lstub_error err;
    size_t n = args->count;
    double *freq = bench_room(n, sizeof *freq), *s = bench_room(2 * n * (size_t)(p * p), sizeof *s);
    if (way == NULL || (!pair && !unlike && strncmp(args->what, "single:", 7) != 0)
        || (strcmp(way, ":model") != 0 && strcmp(way, ":table") != 0 && strcmp(way, ":read") != 0))
        bench_stop("WHAT is single, unlike or pair, a colon, and model, table or read");
    read = way[1] == 'r';
    LSTUB_INIT(err);
    LSTUB_INIT(options);
    options.f_table = way[1] == 'm' ? 0.0 : 67e9;
    LSTUB_INIT(via);
    via.drill = 0.25e-3;
    via.antipad = 0.7e-3;
    via.antipads = &opening;
    via.antipad_count = 1;
    via.connects = connects;
    via.connect_count = 2;
    via.return_kind = LSTUB_RETURN_VIAS;
    via.return_count = pair ? 3 : 4;
    via.return_distance = pair ? 0.0 : 0.9e-3;
    via.return_xy = pair ? beside : NULL;
    via.pair_kind = pair ? LSTUB_PAIR_SEPARATE : LSTUB_PAIR_NONE;
    via.pair_pitch = pair ? 0.9e-3 : 0.0;
    LSTUB_INIT(port[0]);
    LSTUB_INIT(port[1]);
    port[0].kind = LSTUB_PORT_COAX;
    port[1].kind = LSTUB_PORT_TRACE;
    port[1].layer = TRACE;
    port[1].impedance = 50.0;
    port[1].dk = 3.6;
    port[1].loss_tangent = 0.005;
    port[1].distance = 2e-3;
    for (size_t i = 0; i < n; i++)
        freq[i] = 0.05e9 + 66.95e9 * (double)i / (double)(n - 1);
    for (int i = 0; i < args->repeats; i++) {
        lstub_transition *t;
        double start = bench_now();
        if (lstub_transition_create(stackup, &via, port, 2, sizeof port[0], &options, NULL, &t, &err) < 0)
            bench_stop(err.message);
        if (read)
            start = bench_now();
        if (lstub_transition_s(t, freq, n, s, NULL, &err) < 0)
            bench_stop(err.message);
        printf("%.9f\n", bench_now() - start);
        lstub_transition_destroy(t);
    }
    if (pair) {                                         /* S21 + S23: both entries driven alike */
        const double *own = s + 2 * 4, *other = s + 2 * (4 + 2);
        fprintf(stderr, "%.17g %.17g\n", first_minimum(freq, n, own, other, -1.0, 32),
                first_minimum(freq, n, own, other, 1.0, 32));
    } else {
        fprintf(stderr, "%.17g\n", first_minimum(freq, n, s + 2 * 2, NULL, 0.0, 8));
    }
    free(freq);
    free(s);
    lstub_stackup_destroy(stackup);
}

/* Points, and the sum of all real and all imaginary parts, go to the error output. */
void bench_touchstone(const bench_args *args)
{
    lstub_error err;
    LSTUB_INIT(err);
    for (int i = 0; i < args->repeats; i++) {
        lstub_touchstone *file;
        lstub_touchstone_data data;
        double start = bench_now(), re = 0.0, im = 0.0;
        if (lstub_touchstone_load(args->path, 0, NULL, &file, &err) < 0)
            bench_stop(err.message);
        printf("%.9f\n", bench_now() - start);
        LSTUB_INIT(data);
        if (lstub_touchstone_get(file, &data, &err) < 0)
            bench_stop(err.message);
        for (size_t k = 0; k < data.points * (size_t)(data.ports * data.ports); k++) {
            re += data.data[2 * k];
            im += data.data[2 * k + 1];
        }
        if (i == 0)
            fprintf(stderr, "%lu %.17g %.17g\n", (unsigned long)data.points, re, im);
        lstub_touchstone_destroy(file);
    }
}
