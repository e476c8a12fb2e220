#include "bounds/panel.h"

#include <string.h>

void tml_panel_uppers(const float *limit, size_t stride, int n, int first, int count, float *rows, size_t width) {
    for (int k = 0; k < count; k++) {
        int row = first + k;
        memcpy(&rows[(size_t)k * width + (size_t)row], &limit[(size_t)row * stride + (size_t)row], (size_t)(n - row) * sizeof *rows);
        rows[(size_t)k * width + (size_t)row] = 0;
    }
    for (int j = 0; j < first + count; j++) /* the part left of the diagonal stands in the columns above it */
        for (int k = 0; k < count; k++)
            if (j < first + k) rows[(size_t)k * width + (size_t)j] = limit[(size_t)j * stride + (size_t)(first + k)];
}

void tml_panel_lowers(const float *limit, size_t stride, int n, int first, int count, float *rows, size_t width) {
    for (int k = 0; k < count; k++) {
        int row = first + k;
        memcpy(&rows[(size_t)k * width], &limit[(size_t)row * stride], (size_t)row * sizeof *rows);
        rows[(size_t)k * width + (size_t)row] = 0;
    }
    for (int j = first; j < n; j++)
        for (int k = 0; k < count; k++)
            if (j > first + k) rows[(size_t)k * width + (size_t)j] = limit[(size_t)j * stride + (size_t)(first + k)];
}

void tml_panel_pack(const float *rows, size_t width, int depth, int n, int from, int to, int strip, float filler, float *packed) {
    for (int j = from; j < to; j += strip) {
        float *out = packed + (size_t)j * (size_t)depth;
        int count = n - j < strip ? n - j : strip;
        for (int k = 0; k < depth; k++, out += strip) {
            memcpy(out, &rows[(size_t)k * width + (size_t)j], (size_t)count * sizeof *out);
            for (int l = count; l < strip; l++) out[l] = filler;
        }
    }
}
