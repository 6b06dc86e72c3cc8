/* Numbers and units in text, read the same in every locale. */
#ifndef LSTUB_IPC2581_TEXT_H
#define LSTUB_IPC2581_TEXT_H

/*
** A decimal number: blanks, sign, digits with a point, exponent, blanks, and nothing else. 1 when it is one and
** finite; 0 otherwise (empty, NaN, INF, hexadecimal, beyond double, rest of a word), *value untouched. Correctly
** rounded up to 15 digits with exponents within 22, a unit or two in the last place beyond.
*/
int lstub__parse_double(const char *text, double *value);

/* Metres in a unit of length as IPC-2581 writes it (INCH, MILLIMETER, MM, MICRON); 0: it is none. */
double lstub__length_unit(const char *text);

#endif
