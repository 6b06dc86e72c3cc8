/* A stub as a uniform line with a capacitance at its open end: the electrical half of both closed-form fidelities. */
#ifndef LSTUB_LINE_H
#define LSTUB_LINE_H

#include "material/material.h"

#define LSTUB__F_MIN 1e6     /* Hz, band that the model answers for */
#define LSTUB__F_MAX 1e12

#define LSTUB__SHORT 1e30    /* S, admittance of a short circuit */

typedef struct lstub__line {
    double length;             /* m                                                                       */
    double c_constant, c_slope; /* F/m: C'(f) = c_constant + c_slope lambda(f)                            */
    double c_end;              /* F                                                                       */
    double inductance;         /* H/m; unused where radial                                                */
    double radial_dk;          /* > 0: no return near, L' is that of the radial wave in this Dk           */
    double radius;             /* m, of the barrel                                                        */
    double f_range;            /* Hz                                                                      */
    double stated_error;
    int    lossless;           /* no loss anywhere: the notch is the zero of the reactance                */
} lstub__line;

cplx lstub__line_inductance(const lstub__line *line, double f);
cplx lstub__line_capacitance(const lstub__line *line, double f);
/* Input admittance: 0 S far below the first notch, where Zin would be huge. */
cplx lstub__line_admittance(const lstub__line *line, double f);

/* The lowest notch, the least |S21| of the stub across a matched line, above `after` and up to f_max; HUGE_VAL: none. */
double lstub__line_notch(const lstub__line *line, double z_ref, double after, double f_max);

#endif
