/* The next notch of a shunt stub above a frequency, by sampling that refines itself. */
#ifndef LSTUB_NOTCH_SEARCH_H
#define LSTUB_NOTCH_SEARCH_H

#include "num/cplx.h"

typedef cplx lstub__zin_at(const void *model, double freq);

/*
** Lowest minimum of |S21|, S21 = 2 Z/(2 Z + z_ref), in f_low .. f_high: its frequency, HUGE_VAL where there is none, NaN where Z
** is not finite. `step`: first sampling, Hz: a tenth of the lowest quarter-wave frequency expected, or less.
** `bend`: |G| that the middle of an interval may be off its ends' mean before it is halved; LSTUB__BEND_FINE to miss nothing.
*/
#define LSTUB__BEND_FINE   8e-3
#define LSTUB__BEND_COARSE 0.2      /* for the first notch, whose place is known roughly */
double lstub__notch_search(lstub__zin_at *zin, const void *model, double z_ref, double f_low, double f_high, double step,
                           double bend);

#endif
