/*
** The half-space below the board. A ring of E_rho between two rims radiates through
**
**     reaction = integral of (J0(l x_i) - J0(l x_i+1)) (J0(l x_j) - J0(l x_j+1)) / (l sqrt(l^2 - k^2)) dl .
**
** Expanded in k, the integrals of J0(l x) J0(l y)/l^2, /l^4, /l^6 are (finite parts) -<R>, <R^3>/9, -<R^5>/225, where R is
** the distance of two points on the circles x and y and < > the mean over the angle: elliptic integrals. What lies
** below l = k gives the first radiating term, -(2j/3) k^3 (x_(i+1)^2 - x_i^2)(x_(j+1)^2 - x_j^2)/16.
*/
#include "model/cavity_model.h"
#include "num/elliptic.h"

/* Means over the angle of R, R^3, R^5. */
static void distance_means(double x, double y, double mean[3])
{
    double s = x + y, d = x - y, m1 = (d / s) * (d / s), m = 1.0 - m1, k, e, p1, p3, p5;

    lstub__elliptic(m1 > 1e-300 ? m1 : 1e-300, &k, &e);
    /* integrals of (1 - m sin^2)^(p/2) over a quarter turn, p = 1, 3, 5 */
    p1 = e;
    p3 = (2.0 * (2.0 - m) * e - m1 * k) / 3.0;
    p5 = (4.0 * (2.0 - m) * p3 - 3.0 * m1 * p1) / 5.0;
    mean[0] = 2.0 / LSTUB_PI * s * p1;
    mean[1] = 2.0 / LSTUB_PI * s * s * s * p3;
    mean[2] = 2.0 / LSTUB_PI * s * s * s * s * s * p5;
}

void cav_half_space(const cav_face *face, const double *c, double *out)
{
    int n = face->cells, r = face->refine, i, j, p, q;

    for (i = 0; i < n; i++) {
        for (j = 0; j <= i; j++) {
            double sum[4] = { 0.0, 0.0, 0.0, 0.0 }, square_i = 0.0, square_j = 0.0;
            for (p = 0; p <= r; p++) {
                double x = face->x[i * r + p], cp = c[i * (r + 1) + p];
                square_i += cp * x * x;
                square_j += c[j * (r + 1) + p] * face->x[j * r + p] * face->x[j * r + p];
                for (q = 0; q <= r; q++) {
                    double mean[3], f = cp * c[j * (r + 1) + q];
                    distance_means(x, face->x[j * r + q], mean);
                    sum[0] -= f * mean[0];
                    sum[1] += f * mean[1] / 18.0;
                    sum[2] -= f * mean[2] / 600.0;
                }
            }
            sum[3] = 2.0 / 3.0 * square_i * square_j / 16.0;
            for (p = 0; p < 4; p++) out[(p * n + i) * n + j] = out[(p * n + j) * n + i] = sum[p];
        }
    }
}
