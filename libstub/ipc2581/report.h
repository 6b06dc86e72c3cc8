/* A plan seen hole by hole, with names: what the tables and the summary are made from. */
#ifndef LSTUB_IPC2581_REPORT_H
#define LSTUB_IPC2581_REPORT_H

#include "ipc2581/board.h"

typedef struct lstub__report {
    const lstub_board *board;
    const lstub_plan  *plan;
    int                named;        /* the plan's signals are those of the rules the board was read with */
} lstub__report;

typedef struct lstub__row {
    const board_hole *hole;
    lstub_decision    decision;
    int               judged;        /* the numbers before and after the plan are there                */
    const char       *signal;        /* "" where there is none, or its name is not known               */
    double            symbol_rate;   /* Bd; NaN: none, or not known                                    */
    int32_t           levels;        /* 0: none, or not known                                          */
} lstub__row;

/* LSTUB_E_ARGUMENT where the plan cannot be one of this board. */
int32_t lstub__report_open(lstub__report *report, const lstub_board *board, const lstub_plan *plan, lstub_error *err);
int32_t lstub__report_row(const lstub__report *report, size_t index, lstub__row *row, lstub_error *err);
/* Name of a stackup layer, "" where there is no such layer. */
const char *lstub__report_layer(const lstub_board *board, int32_t layer);

#endif
