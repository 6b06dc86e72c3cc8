/* Fewest points that stab a set of intervals, then moved to where they are liked best. */
#include "plan/plan.h"

#include <math.h>
#include <stdlib.h>

static int by_high(const void *a, const void *b)
{
    const lstub__interval *x = a, *y = b;
    if (x->high != y->high)
        return x->high < y->high ? -1 : 1;
    if (x->low != y->low)
        return x->low < y->low ? -1 : 1;
    return x->owner < y->owner ? -1 : x->owner > y->owner;
}

/* The nearest round number to x in [low, high]: 50 um, 10 um or 1 um steps, whichever fits first; else x itself. */
static double rounded(double x, double low, double high)
{
    static const double per_metre[] = {20e3, 100e3, 1e6};    /* exact in binary, unlike the steps */
    for (size_t i = 0; i < sizeof per_metre / sizeof per_metre[0]; i++) {
        double first = ceil(low * per_metre[i] - 1e-9), last = floor(high * per_metre[i] + 1e-9);
        double n = fmin(fmax(floor(x * per_metre[i] + 0.5), first), last);
        double y = n / per_metre[i];
        if (first <= last && y >= low && y <= high)
            return y;
    }
    return x;
}

static double nearest_allowed(double x, double low, double high, const lstub__capability *capability)
{
    double best = high;
    for (size_t i = 0; i < capability->in.depth_count; i++) {
        double depth = capability->depths[i];
        if (depth >= low && depth <= high && fabs(depth - x) < fabs(best - x))
            best = depth;
    }
    return best;
}

/*
** Greedy from the least upper end: the next point is the highest that serves the first interval not yet served. No
** set of fewer points can do, since each point answers for an interval that no other point lies in.
*/
int32_t lstub__stab(lstub__interval *intervals, size_t count, const lstub__capability *capability)
{
    int32_t points = 0;
    qsort(intervals, count, sizeof *intervals, by_high);
    for (size_t i = 0; i < count; i++)
        intervals[i].point = NAN;
    for (size_t i = 0; i < count; i++) {
        if (!isnan(intervals[i].point))
            continue;
        double point = intervals[i].high, low = intervals[i].low, high = point, wanted = 0.0, weight = 0.0;
        for (size_t j = i; j < count; j++) {
            lstub__interval *one = &intervals[j];
            if (!isnan(one->point) || one->low > point)
                continue;
            low = fmax(low, one->low);
            high = fmin(high, one->high);
            wanted += one->weight * one->aim;
            weight += one->weight;
        }
        double x = fmin(fmax(wanted / weight, low), high);
        x = capability->in.depth_count > 0 ? nearest_allowed(x, low, high, capability) : rounded(x, low, high);
        for (size_t j = i; j < count; j++)
            if (isnan(intervals[j].point) && intervals[j].low <= point)
                intervals[j].point = x;
        points++;
    }
    return points;
}
