/* A measured |S|^2 on its way to notches: averaged, its trend, and what stubs explain of it. */
#ifndef LSTUB_CURVE_H
#define LSTUB_CURVE_H

#include "base/base.h"

typedef struct lstub__curve {
    size_t  n;
    const double *f;             /* Hz, rising                                                        */
    double *power;               /* |S|^2 as measured                                                 */
    double *sum;                 /* its integral from the first frequency                             */
    double *db;                  /* averaged, dB                                                      */
    double *trend;               /* of the channel alone, dB                                          */
    double *stubs;               /* what the stubs found so far take away, dB, <= 0                   */
    double *scratch;             /* [n]                                                               */
    double  window;              /* Hz, of the average                                                */
    double  spread;              /* see lstub__curve_spread, dB                                       */
} lstub__curve;

typedef struct lstub__dip {      /* a minimum of db - trend                                           */
    size_t at;
    double depth;                /* dB, positive                                                      */
} lstub__dip;

typedef struct lstub__shape {    /* an open stub across the line, as its notch shows it               */
    double f, f_sigma;           /* Hz; by what scatters within its flanks                            */
    double f_ripple;             /* Hz, standard error of f by each dB rms of ripple                  */
    double zeta;                 /* of Zin = -j zeta Z0/2 cot(pi f'/(2 f)) next to the notch           */
    double floor;                /* q at the notch, window taken out; q = D/(1 - D), D = |S21|^2       */
    double floor_sigma;
} lstub__shape;

/* The least window that averages, three samples; and one from the data, see lstub_search. */
double lstub__curve_least_window(const lstub__curve *curve);
double lstub__curve_window(const lstub__curve *curve);
/* Averages over curve->window, less at the ends, where it would reach beyond them. */
void   lstub__curve_average(lstub__curve *curve);
/* Mean of the power between two frequencies of the band, dB; needs the averages made. */
double lstub__curve_mean(const lstub__curve *curve, double from, double to);
/* Fits the trend to db - stubs. upper: to its upper envelope, as long as the stubs are not known. */
void   lstub__curve_trend(lstub__curve *curve, int upper);

/* 1.48 times the median of |db - trend - stubs|: sigma where it is normal. */
double lstub__curve_spread(const lstub__curve *curve);

/* The shape of a dip; 0 where it has none. */
int    lstub__shape_fit(const lstub__curve *curve, const lstub__dip *dip, lstub__shape *shape);
/* |S21| of a shape in dB, up to where its next notch begins. */
double lstub__shape_db(const lstub__shape *shape, double f);
/* f over the width 3 dB above the floor; NaN where it is not that deep. */
double lstub__shape_q(const lstub__shape *shape);

#endif
