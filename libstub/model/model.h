/* A compiled model: the stubs of a via as lines. */
#ifndef LSTUB_MODEL_H
#define LSTUB_MODEL_H

#include "model/site.h"

struct lstub_model {
    lstub_allocator alloc;
    int32_t     fidelity, count;
    double      z_ref;
    lstub_stub  stub[2];
    lstub__line line[2];
};

/* Lines of the barrel as it is, top one first; their number. */
int32_t lstub__site_lines(const lstub__site *site, lstub__line *lines);
/* First notch of several lines, HUGE_VAL where there is none; *which: the line that makes it, or -1. */
double lstub__lines_first_notch(const lstub__line *lines, int32_t count, double z_ref, int32_t *which);

#endif
