/* Ports of a network in another order. */
#include "base/base.h"

#include <string.h>

int32_t lstub_port_map(const double *src, size_t n, int32_t ports, const int32_t *map, int32_t count, double *dst,
                       lstub_error *err)
{
    double one[2 * LSTUB_PORTS_MAX * LSTUB_PORTS_MAX];
    if (lstub__need(map, "map", err) < 0 || (n > 0 && (lstub__need(src, "src", err) < 0 || lstub__need(dst, "dst", err) < 0)))
        return LSTUB_E_NULL;
    if (ports < 1 || ports > LSTUB_PORTS_MAX)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "ports", -1, "ports = %ld: must be >= 1 and <= %d", (long)ports, LSTUB_PORTS_MAX);
    if (count < 1 || count > ports)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "count", -1, "count = %ld: must be >= 1 and <= ports = %ld", (long)count, (long)ports);
    for (int32_t i = 0; i < count; i++) {
        if (map[i] < 0 || map[i] >= ports)
            return lstub__fail(err, LSTUB_E_ARGUMENT, "map", i, "map[%ld] = %ld: must be >= 0 and < ports = %ld", (long)i, (long)map[i], (long)ports);
        for (int32_t j = 0; j < i; j++)
            if (map[j] == map[i])
                return lstub__fail(err, LSTUB_E_ARGUMENT, "map", i, "map[%ld] = %ld: map[%ld] is the same port", (long)i, (long)map[i], (long)j);
    }
    for (size_t k = 0; k < n; k++) {
        const double *from = src + 2 * k * (size_t)(ports * ports);
        for (int32_t i = 0; i < count; i++)
            for (int32_t j = 0; j < count; j++)
                memcpy(&one[2 * (i * count + j)], &from[2 * (map[i] * ports + map[j])], 2 * sizeof *one);
        memcpy(dst + 2 * k * (size_t)(count * count), one, 2 * (size_t)(count * count) * sizeof *one);
    }
    return LSTUB_OK;
}
