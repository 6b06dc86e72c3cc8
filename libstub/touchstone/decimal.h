/* Decimal numbers in text, correctly rounded both ways, the same in every locale. */
#ifndef LSTUB_TOUCHSTONE_DECIMAL_H
#define LSTUB_TOUCHSTONE_DECIMAL_H

/*
** Reads sign, digits with a point, exponent (e, or d as Fortran writes it). Returns its end, or null where there is none.
** *value: the number times 10^shift, rounded once, to the nearest double, ties to even; infinite beyond. The text must end
** in something that is no part of a number, and LSTUB__DECIMAL_AHEAD bytes behind that must be there.
*/
#define LSTUB__DECIMAL_AHEAD 8
const char *lstub__decimal_read(const char *text, int shift, double *value);

#define LSTUB__DECIMAL_MAX 40

/* Writes value times 10^shift, value finite, with at most 1 to 17 digits; 0: with as few of 15, 16, 17 as give the same
** double back. Returns the number of bytes, a zero byte after them. */
int lstub__decimal_write(char text[LSTUB__DECIMAL_MAX], double value, int digits, int shift);

#endif
