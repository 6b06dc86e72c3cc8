#include "num/root.h"

#include <math.h>

double lstub__root(lstub__function *f, const void *context, double a, double b, double tol)
{
    double fa = f(a, context), fb = f(b, context);
    int side = 0, slow = 0;
    if (fa == 0.0)
        return a;
    if (fb == 0.0)
        return b;
    if (!((fa < 0.0) != (fb < 0.0)) || isnan(fa) || isnan(fb))
        return NAN;
    while (fabs(b - a) > tol) {
        double width = b - a;
        double x = slow ? 0.5 * (a + b) : b - fb * (b - a) / (fb - fa);
        if (!(x > a && x < b))
            x = 0.5 * (a + b);
        if (x <= a || x >= b)       /* no double between them */
            break;
        double fx = f(x, context);
        if (fx == 0.0)
            return x;
        if ((fx < 0.0) == (fb < 0.0)) {
            b = x;
            fb = fx;
            if (side == -1)
                fa *= 0.5;
            side = -1;
        } else {
            a = x;
            fa = fx;
            if (side == 1)
                fb *= 0.5;
            side = 1;
        }
        slow = !slow && b - a > 0.5 * width;
    }
    return 0.5 * (a + b);
}

double lstub__minimum(lstub__function *f, const void *context, double a, double b, double tol)
{
    const double part = 0.38196601125010515;   /* 2 - golden ratio */
    double x = a + part * (b - a), y = b - part * (b - a);
    double fx = f(x, context), fy = f(y, context);
    while (b - a > tol) {
        if (fx <= fy) {
            b = y;
            y = x;
            fy = fx;
            x = a + part * (b - a);
            fx = f(x, context);
        } else {
            a = x;
            x = y;
            fx = fy;
            y = b - part * (b - a);
            fy = f(y, context);
        }
    }
    return 0.5 * (a + b);
}
