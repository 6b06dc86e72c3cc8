/* A stackup as it is kept: every layer with its depths and with a dielectric, copper layers with their resin. */
#ifndef LSTUB_STACKUP_H
#define LSTUB_STACKUP_H

#include "material/material.h"

typedef struct lstub__layer {
    const char      *name;
    int32_t          kind;
    double           thickness, tol_plus, tol_minus;
    double           top, bottom;      /* depths of its faces, m */
    lstub_dielectric dielectric;
    lstub_conductor  conductor;
    lstub__wideband  eps;              /* through-plane */
} lstub__layer;

struct lstub_stackup {
    lstub_allocator alloc;
    int32_t         count, copper_count;
    int32_t         first_copper, last_copper;
    lstub__layer   *layer;
    char           *names;
};

#define LSTUB__SLACK 1e-12             /* m: depths that were added up in another order are equal */

static inline int lstub__is_copper(int32_t kind) { return kind != LSTUB_LAYER_DIELECTRIC; }

/* "layer 3 'L2'" for messages. */
typedef struct lstub__label { char text[LSTUB_NAME_MAX + 32]; } lstub__label;
lstub__label lstub__layer_label(const lstub_stackup *stackup, int32_t index);

/* Index checked: within the stackup, and of copper if asked. */
int32_t lstub__layer_index(const lstub_stackup *stackup, int32_t index, int copper, const char *field, lstub_error *err);

#endif
