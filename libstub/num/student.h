/* Student's t and chi squared, for whole degrees of freedom, where both are finite sums. */
#ifndef LSTUB_STUDENT_H
#define LSTUB_STUDENT_H

#include <stdint.h>

/* t that a variable of Student's distribution keeps within, either side of 0, with probability p, 0 < p < 1: to 1e-12
** relative for p up to 0.99. dof 0: of the normal distribution. */
double lstub__student_within(double p, int32_t dof);

/* Probability that chi squared of dof >= 1 is more than x >= 0: to 1e-12 absolute. */
double lstub__chi2_above(double x, int32_t dof);

#endif
