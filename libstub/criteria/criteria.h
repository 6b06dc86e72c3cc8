/* Signals and criteria checked; judging branches against them. Knows no physics: only notches and losses. */
#ifndef LSTUB_CRITERIA_H
#define LSTUB_CRITERIA_H

#include "model/model.h"

typedef struct lstub__demand {     /* a signal with its criteria */
    double nyquist, bit_rate;      /* Hz, b/s                                        */
    double notch_ratio, loss_db;   /* as in lstub_criteria, 0: not asked             */
    double least_f1;               /* Hz, first notch that every criterion can bear  */
} lstub__demand;

int32_t lstub__signal_take(lstub_signal *ours, const lstub_signal *theirs, lstub_error *err);
int32_t lstub__criteria_take(lstub_criteria *ours, const lstub_criteria *theirs, lstub_error *err);
int32_t lstub__demand_make(lstub__demand *demand, const lstub_signal *signal, const lstub_criteria *criteria, lstub_error *err);

/* Judges branches; never fails. Returns LSTUB_OK, or LSTUB_W_RANGE when the answer leans on the model beyond its range. */
int32_t lstub__judge(const lstub__branch *branches, int32_t count, double z_ref, const lstub__demand *demand, lstub_margin *margin);
/* What is left of the tightest criterion, as a part of its limit: >= 0 when they pass; falls as a stub grows. */
double lstub__left_over(const lstub__branch *branches, int32_t count, double z_ref, const lstub__demand *demand);

/*
** Longest length of the stub on one arm that passes, with the other arm's branch beside it (null: none): m, 0 if none
** passes, the whole arm if all do. *limited_by: LSTUB_LIMIT_...
*/
int32_t lstub__longest(const lstub__site *site, int arm, const lstub__branch *other, const lstub__demand *demand, double *length,
                       int32_t *limited_by, lstub_error *err);

#endif
