/*
** A table for sweeps: S over frequency in panels, each a Chebyshev series of degree ORDER - 1, halved until the last terms are below
** TAIL. What is read from it does not hang on what else is asked. Below LOWEST, where skin effects bend it, there is none.
*/
#include "model/transition.h"

#include <math.h>
#include <string.h>

#define ORDER   LSTUB__PANEL_ORDER
#define LOWEST  2e8         /* Hz                                                                        */
#define WIDTH   5e9         /* Hz, of a panel at first                                                   */
#define TAIL    1e-10       /* largest of a panel's last two terms                                       */
#define NARROW  2e7         /* Hz, panels are not halved below this                                      */

/* Series of all elements from their values at the nodes: c_k = (2 - [k = 0])/n sum f(x_j) cos(k (j + 1/2) pi/n). */
static void fit(const lstub_transition *t, double low, double high, int size, double *coef)
{
    double value[ORDER * LSTUB__TABLE_SIZE];
    for (int j = 0; j < ORDER; j++) {
        double x = cos((j + 0.5) * LSTUB_PI / ORDER);
        lstub__transition_whole(t, 0.5 * (low + high) + 0.5 * (high - low) * x, &value[j * size]);
    }
    for (int k = 0; k < ORDER; k++)
        for (int e = 0; e < size; e++) {
            double sum = 0.0;
            for (int j = 0; j < ORDER; j++)
                sum += value[j * size + e] * cos(k * (j + 0.5) * LSTUB_PI / ORDER);
            coef[k * size + e] = sum * (k == 0 ? 1.0 : 2.0) / ORDER;
        }
}

static double tail(const double *coef, int size)
{
    double most = 0.0;
    for (int e = (ORDER - 2) * size; e < ORDER * size; e++)
        if (!(fabs(coef[e]) <= most))
            most = fabs(coef[e]);
    return most;
}

/* Adds panels from low to high; a status. coef: working space. */
static int32_t add(lstub_transition *t, double low, double high, double *coef, size_t *room, lstub_error *err)
{
    int size = 2 * t->size * t->size;
    fit(t, low, high, size, coef);
    if (!(tail(coef, size) <= TAIL) && high - low > NARROW) {
        int32_t status = add(t, low, 0.5 * (low + high), coef, room, err);
        return status < 0 ? status : add(t, 0.5 * (low + high), high, coef, room, err);
    }
    lstub__panel *grown = lstub__grow(&t->alloc, t->panel, t->panels, room, sizeof *grown, err);
    if (grown == NULL)
        return LSTUB_E_MEMORY;
    t->panel = grown;
    lstub__panel *p = &t->panel[t->panels];
    p->coef = lstub__new(&t->alloc, (size_t)(ORDER * size), sizeof *p->coef, err);
    if (p->coef == NULL)
        return LSTUB_E_MEMORY;
    memcpy(p->coef, coef, (size_t)(ORDER * size) * sizeof *coef);
    p->low = low;
    p->high = high;
    t->panels++;
    return LSTUB_OK;
}

int32_t lstub__table_build(lstub_transition *t, double f_table, lstub_error *err)
{
    double coef[ORDER * LSTUB__TABLE_SIZE];
    size_t room = 0;
    int32_t status = LSTUB_OK;
    int count = (int)ceil((f_table - LOWEST) / WIDTH);
    for (int i = 0; i < count && status == LSTUB_OK; i++)
        status = add(t, LOWEST + (f_table - LOWEST) * i / count, LOWEST + (f_table - LOWEST) * (i + 1) / count, coef, &room, err);
    return status;
}

void lstub__table_drop(lstub_transition *t)
{
    for (size_t i = 0; i < t->panels; i++)
        lstub__free(&t->alloc, t->panel[i].coef);
    lstub__free(&t->alloc, t->panel);
}

int lstub__table_read(const lstub_transition *t, double f, double *out)
{
    size_t low = 0, high = t->panels;
    int size = 2 * t->size * t->size;
    if (high == 0 || f < t->panel[0].low || f > t->panel[high - 1].high)
        return 0;
    while (high - low > 1) {
        size_t middle = (low + high) / 2;
        if (f < t->panel[middle].low)
            high = middle;
        else
            low = middle;
    }
    const lstub__panel *p = &t->panel[low];
    double x = (2.0 * f - p->low - p->high) / (p->high - p->low), a = 1.0, b = x;
    for (int e = 0; e < size; e++)
        out[e] = p->coef[e] + x * p->coef[size + e];
    for (int k = 2; k < ORDER; k++) {
        const double *restrict c = p->coef + k * size;
        double next = 2.0 * x * b - a;
        for (int e = 0; e < size; e++)
            out[e] += next * c[e];
        a = b;
        b = next;
    }
    return 1;
}
