/* A compiled model: the stubs of a via as branches. */
#ifndef LSTUB_MODEL_H
#define LSTUB_MODEL_H

#include "model/branch.h"

struct lstub_model {
    lstub_allocator alloc;
    int32_t       fidelity, count;
    double        z_ref;
    lstub_stub    stub[2];
    lstub__branch branch[2];
};

#endif
