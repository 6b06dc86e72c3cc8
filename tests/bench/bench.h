/* What the parts of the benchmark program share. */
#ifndef LSTUB_BENCH_H
#define LSTUB_BENCH_H

#include <libstub.h>

#include <stdio.h>
#include <stdlib.h>

typedef struct bench_args {
    const char *path, *what;    /* second argument, and the last one where the job has it */
    size_t      count;
    int         repeats;
} bench_args;

double bench_now(void);                                 /* s */
void   bench_stop(const char *what);
void  *bench_room(size_t count, size_t bytes);          /* zeroed; stops where there is none */

void bench_compile(const bench_args *args);
void bench_bytes(const bench_args *args);
void bench_cavity(const bench_args *args);
void bench_ladder(const bench_args *args);
void bench_first(const bench_args *args);
void bench_second(const bench_args *args);
void bench_transition(const bench_args *args);
void bench_touchstone(const bench_args *args);

#endif
