/* Traces as lines: what a model evaluates at each frequency. */
#ifndef LSTUB_TRACE_H
#define LSTUB_TRACE_H

#include "material/material.h"

/* Z' = jw L' + strip and planes, Y' = jw C'. All that does not hang on frequency. */
typedef struct lstub__trace_model {
    double          inductance;          /* L' without metal, static, H/m                                    */
    lstub__wideband below, above;        /* effective for the trace: root of through-plane times in-plane    */
    double          share_below, share_above;  /* of each in C' over that in a vacuum, static                 */
    double          planes, metal;       /* incremental inductance over mu0, 1/m; 0: no conductor loss       */
    double          depth;               /* of the strip's current at 0 Hz, m: its resistance is metal/(conductivity depth) */
    lstub_conductor conductor;
    int             disperses;           /* a microstrip, which hangs on:                                    */
    double          u, contrast, dk, x_per_f;
    double          f_range;             /* Hz, top of the stated range                                      */
    const char     *f_reason;            /* why there                                                        */
} lstub__trace_model;

/* Checks a trace and makes its model. LSTUB_W_RANGE where the shape is outside the stated range; f_range is for the caller. */
int32_t lstub__trace_take(lstub__trace_model *model, const lstub_trace *trace, lstub_error *err);

/* Characteristic impedance, ohm, and propagation constant, 1/m, at 1e3 <= f <= 1e12 Hz. */
void lstub__trace_at(const lstub__trace_model *model, double f, cplx *z, cplx *gamma);
/* The line's series impedance and shunt admittance per metre, of which those are made. */
void lstub__trace_per_metre(const lstub__trace_model *model, double f, cplx *series, cplx *shunt);

#endif
