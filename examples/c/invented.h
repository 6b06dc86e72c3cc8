/* Three stackups and six links that the examples share. All invented, though of sizes that exist. */
#ifndef INVENTED_H
#define INVENTED_H

#include <libstub.h>
#include <stdio.h>
#include <stdlib.h>

static const struct { const char *name; int32_t copper; double spacing, dk, loss_tangent; } stackups[] = {
    {"module",    12, 0.090e-3, 3.05, 0.0016},
    {"line card", 20, 0.105e-3, 3.35, 0.0040},
    {"backplane", 28, 0.125e-3, 3.70, 0.0080},
};
static const struct { const char *name; double symbol_rate; int32_t levels; } links[] = {
    {"10.3125 GBd NRZ",  10.3125e9, 2}, {"25.78125 GBd NRZ", 25.78125e9, 2}, {"26.5625 GBd PAM4", 26.5625e9, 4},
    {"32 GBd NRZ",       32e9,      2}, {"53.125 GBd PAM4",  53.125e9,   4}, {"106.25 GBd PAM4",  106.25e9,  4},
};
enum { STACKUPS = 3, LINKS = 6, LAYERS_MAX = 64 };

static void must(int32_t status, const lstub_error *err)
{
    if (status < 0) {
        fprintf(stderr, "%s (%s)\n", err->message, lstub_status_name(status));
        exit(1);
    }
}

/* Copper layer `number` of `count`, from 1: signals and planes take turns from both sides inwards. */
static int is_plane(int32_t number, int32_t count)
{
    return (number <= count / 2 ? number : count + 1 - number) % 2 == 0;
}

static lstub_stackup *make_stackup(int which)
{
    lstub_layer layers[2 * LAYERS_MAX];
    char names[2 * LAYERS_MAX][16];
    lstub_dielectric resin;
    lstub_stackup *stackup = NULL;
    lstub_error err;
    const int32_t copper = stackups[which].copper;
    LSTUB_INIT(err);
    LSTUB_INIT(resin);
    resin.dk = stackups[which].dk;
    resin.in_plane_ratio = 1.15;
    resin.loss_tangent = stackups[which].loss_tangent;
    for (int32_t i = 0; i < 2 * copper - 1; i++) {
        LSTUB_INIT(layers[i]);
        snprintf(names[i], sizeof names[i], "%c%d", i % 2 ? 'D' : 'L', (int)(i / 2 + 1));
        layers[i].name = names[i];
        layers[i].kind = i % 2 ? LSTUB_LAYER_DIELECTRIC
                               : is_plane(i / 2 + 1, copper) ? LSTUB_LAYER_PLANE : LSTUB_LAYER_SIGNAL;
        layers[i].thickness = i % 2 ? stackups[which].spacing : i == 0 || i == 2 * copper - 2 ? 45e-6 : 18e-6;
        layers[i].dielectric = i % 2 ? &resin : NULL;
    }
    must(lstub_stackup_create(layers, (size_t)(2 * copper - 1), sizeof layers[0], NULL, &stackup, &err), &err);
    return stackup;
}

/* A through via of 0.25 mm with four return vias 1 mm away; the caller says where it connects. */
static lstub_via make_via(const int32_t *connects, size_t count)
{
    lstub_via via;
    LSTUB_INIT(via);
    via.drill = 0.25e-3;
    via.pad_start = via.pad_inner = via.pad_end = 0.50e-3;
    via.antipad = 0.75e-3;
    via.return_kind = LSTUB_RETURN_VIAS;
    via.return_count = 4;
    via.return_distance = 1.0e-3;
    via.connects = connects;
    via.connect_count = count;
    return via;
}

static lstub_signal make_signal(int which)
{
    lstub_signal signal;
    LSTUB_INIT(signal);
    signal.symbol_rate = links[which].symbol_rate;
    signal.levels = links[which].levels;
    return signal;
}

#endif
