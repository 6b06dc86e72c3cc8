#include "ipc2581/grid.h"

#include <math.h>

static int32_t clamp(double value, int32_t last)
{
    return value <= 0.0 ? 0 : value >= (double)last ? last : (int32_t)value;
}

static int32_t column(const lstub__grid *g, double x) { return clamp((x - g->x0) / g->cell, g->columns - 1); }
static int32_t row(const lstub__grid *g, double y) { return clamp((y - g->y0) / g->cell, g->rows - 1); }

/* Cells of the size asked for, or larger ones where those would be many more than the points. */
static void measure(lstub__grid *g, double cell)
{
    double x1 = 0.0, y1 = 0.0, most = 4.0 * g->count + 16.0;
    for (int32_t i = 0; i < g->count; i++) {
        g->x0 = i == 0 ? g->x[i] : fmin(g->x0, g->x[i]);
        g->y0 = i == 0 ? g->y[i] : fmin(g->y0, g->y[i]);
        x1 = i == 0 ? g->x[i] : fmax(x1, g->x[i]);
        y1 = i == 0 ? g->y[i] : fmax(y1, g->y[i]);
    }
    double w = x1 - g->x0, h = y1 - g->y0;
    while ((floor(w / cell) + 1.0) * (floor(h / cell) + 1.0) > most)
        cell *= 1.5;
    g->cell = cell;
    g->columns = (int32_t)floor(w / cell) + 1;
    g->rows = (int32_t)floor(h / cell) + 1;
}

static void fill(lstub__grid *g)
{
    int32_t cells = g->columns * g->rows, sum = 0;
    for (int32_t i = 0; i < g->count; i++)
        g->start[row(g, g->y[i]) * g->columns + column(g, g->x[i]) + 1]++;
    for (int32_t c = 0; c <= cells; c++)
        g->start[c] = sum += g->start[c];
    for (int32_t i = g->count - 1; i >= 0; i--)       /* from the end, so that numbers rise within a cell */
        g->item[--g->start[row(g, g->y[i]) * g->columns + column(g, g->x[i]) + 1]] = i;
    for (int32_t c = 0; c < cells; c++)
        g->start[c] = g->start[c + 1];
    g->start[cells] = g->count;
}

/* Heap sort by y, then by number: no recursion, no worst case. */
static int after(const lstub__grid *g, int32_t a, int32_t b)
{
    return g->y[a] > g->y[b] || (g->y[a] == g->y[b] && a > b);
}

static void sift(const lstub__grid *g, int32_t *heap, int32_t at, int32_t count)
{
    for (int32_t child; (child = 2 * at + 1) < count; at = child) {
        if (child + 1 < count && after(g, heap[child + 1], heap[child]))
            child++;
        if (!after(g, heap[child], heap[at]))
            return;
        int32_t swap = heap[at];
        heap[at] = heap[child];
        heap[child] = swap;
    }
}

static void sort(const lstub__grid *g, int32_t *list)
{
    for (int32_t i = 0; i < g->count; i++)
        list[i] = i;
    for (int32_t i = g->count / 2 - 1; i >= 0; i--)
        sift(g, list, i, g->count);
    for (int32_t end = g->count - 1; end > 0; end--) {
        int32_t swap = list[0];
        list[0] = list[end];
        list[end] = swap;
        sift(g, list, 0, end);
    }
}

int32_t lstub__grid_create(lstub__grid *g, const double *x, const double *y, int32_t count, double cell,
                           const lstub_allocator *allocator, lstub_error *err)
{
    g->alloc = allocator;
    g->x = x;
    g->y = y;
    g->count = count;
    g->x0 = g->y0 = 0.0;
    measure(g, cell);
    size_t cells = (size_t)g->columns * (size_t)g->rows, n = (size_t)count;
    g->start = lstub__new(allocator, cells + 2, sizeof *g->start, err);
    g->item = g->start == NULL ? NULL : lstub__new(allocator, n, sizeof *g->item, err);
    g->by_y = g->item == NULL ? NULL : lstub__new(allocator, n, sizeof *g->by_y, err);
    if (g->by_y == NULL) {
        lstub__grid_destroy(g);
        return LSTUB_E_MEMORY;
    }
    fill(g);
    sort(g, g->by_y);
    return LSTUB_OK;
}

void lstub__grid_destroy(lstub__grid *g)
{
    if (g->alloc == NULL)
        return;
    lstub__free(g->alloc, g->start);
    lstub__free(g->alloc, g->item);
    lstub__free(g->alloc, g->by_y);
    g->start = g->item = g->by_y = NULL;
}

void lstub__grid_rows(const lstub__grid *g, double low, double high, int32_t *first, int32_t *last)
{
    *first = row(g, low);
    *last = row(g, high);
    if (g->count == 0 || high < g->y0 || low > g->y0 + g->rows * g->cell)
        *last = *first - 1;
}

double lstub__grid_row_low(const lstub__grid *g, int32_t r) { return g->y0 + r * g->cell; }

void lstub__grid_row(const lstub__grid *g, int32_t r, double low, double high, int32_t *from, int32_t *to)
{
    *from = *to = 0;
    if (high < g->x0 || low > g->x0 + g->columns * g->cell)
        return;
    *from = g->start[r * g->columns + column(g, low)];
    *to = g->start[r * g->columns + column(g, high) + 1];
}

int32_t lstub__grid_above(const lstub__grid *g, double y)
{
    int32_t low = 0, high = g->count;
    while (low < high) {
        int32_t middle = low + (high - low) / 2;
        if (g->y[g->by_y[middle]] < y)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}
