/* A stub as a branch across the signal path: one barrel cut to one length, at one fidelity, ready to be asked. */
#ifndef LSTUB_BRANCH_H
#define LSTUB_BRANCH_H

#include "model/barrel.h"
#include "model/cavity.h"
#include "model/ladder.h"

typedef struct lstub__branch {
    int32_t     fidelity;
    int         lossless;          /* no loss anywhere: the notch is the zero of the reactance                  */
    double      length;            /* m                                                                         */
    double      f_range;           /* Hz, top of the stated range                                               */
    double      f_top;             /* Hz, above which there is no answer                                        */
    double      stated_error;      /* of the first notch, relative; NaN: estimated for each                     */
    lstub__line line;              /* the closed form; for other fidelities where their searches begin          */
    lstub__barrel *barrel;         /* LADDER and CAVITY, else null                                              */
    lstub__ladder *ladder;         /* LADDER, else null                                                         */
    lstub__cavity *cavity, *other; /* CAVITY, else null; other: once lstub__branch_estimate has made it ...     */
    int         finer;             /* ... which then has more annuli, not fewer                                 */
} lstub__branch;

/* The stub on an arm of the site cut to `length` (0 < length <= full; full: not drilled). Undone by _done. */
int32_t lstub__branch_make(lstub__branch *branch, const lstub__site *site, int arm, double length, lstub_error *err);
/* Top of the range that the site's fidelity states for an arm, Hz. */
double  lstub__branch_range(const lstub__site *site, int arm);
/* The same as its closed form alone: never fails, owns nothing. */
void    lstub__branch_closed(lstub__branch *branch, const lstub__site *site, int arm, double length);
void    lstub__branch_done(lstub__branch *branch);
/* Adds what lstub__branch_notch_error needs. */
int32_t lstub__branch_estimate(lstub__branch *branch, const lstub__site *site, lstub_error *err);

cplx    lstub__branch_admittance(const lstub__branch *branch, double f);
/* The lowest notch (least |S21|) above `after`, up to f_max; HUGE_VAL where there is none. */
double  lstub__branch_notch_error(const lstub__branch *branch, double z_ref, double f);   /* relative, of the notch at f */
double  lstub__branch_notch(const lstub__branch *branch, double z_ref, double after, double f_max);

#define LSTUB__LOSS_MOST 300.0     /* dB, of a lossless notch: a zero, whatever rounding leaves of it           */

/* Several branches at one place: |S21| squared, loss, first notch of all (HUGE_VAL; *which: whose, or -1). */
cplx    lstub__branches_admittance(const lstub__branch *branches, int32_t count, double f);
double  lstub__branches_power(const lstub__branch *branches, int32_t count, double z_ref, double f);
double  lstub__branches_loss_db(const lstub__branch *branches, int32_t count, double z_ref, double f);
double  lstub__branches_first_notch(const lstub__branch *branches, int32_t count, double z_ref, int32_t *which);

/* Both arms cut to these lengths (0: none), top one first, *count of them; undone by _done on each. */
int32_t lstub__branches_make(lstub__branch *branches, int32_t *count, const lstub__site *site, double top, double bottom,
                             lstub_error *err);
void    lstub__branches_done(lstub__branch *branches, int32_t count);

#endif
