/* Numbers and paths as text, the same in every locale. */
#ifndef LSTUB_IPC2581_NUMBER_H
#define LSTUB_IPC2581_NUMBER_H

#define LSTUB__NUMBER_MAX 40

/* Both return text; "" for NaN and infinity, never "-0". */
const char *lstub__significant(char text[LSTUB__NUMBER_MAX], double value, int digits);   /* like %g, 1 to 15 */
const char *lstub__fixed(char text[LSTUB__NUMBER_MAX], double value, int decimals);  /* like %f; beyond 1e15 %g */

/*
** A length in units of `unit` metres with the fewest decimals that give it back to 1 pm, and are no less than `least`
** (m) when read: lstub__parse_double(text) * unit.
*/
const char *lstub__length_text(char text[LSTUB__NUMBER_MAX], double length, double least, double unit);

/* The last part of a long path, for messages that have to end with the reason. */
const char *lstub__path_tail(const char *path);

#endif
