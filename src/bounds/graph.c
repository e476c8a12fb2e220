#include "bounds/graph.h"

#include <math.h>
#include <stdlib.h>

#include "base/memory.h"

bool tml_graph_open(tml_graph *graph, const tml_given *givens, size_t given_count, int32_t n) {
    size_t count = (size_t)n;
    *graph = (tml_graph){.givens = givens, .n = n};
    graph->first = tml_alloc(count + 2, sizeof *graph->first);
    graph->edges = tml_alloc(2 * given_count, sizeof *graph->edges);
    graph->distance = tml_alloc(count, sizeof *graph->distance);
    graph->via = tml_alloc(count, sizeof *graph->via);
    graph->heap = tml_alloc(count, sizeof *graph->heap);
    graph->place = tml_alloc(count, sizeof *graph->place);
    graph->touched = tml_alloc(count, sizeof *graph->touched);
    if (graph->first == NULL || graph->edges == NULL || graph->distance == NULL || graph->via == NULL || graph->heap == NULL ||
        graph->place == NULL || graph->touched == NULL || given_count > INT32_MAX / 2) {
        tml_graph_close(graph);
        return false;
    }
    for (size_t i = 0; i < given_count; i++) {
        if (!givens[i].is_upper) continue;
        graph->first[givens[i].a + 2]++;
        graph->first[givens[i].b + 2]++;
    }
    for (int32_t i = 0; i < n; i++) graph->first[i + 2] += graph->first[i + 1];
    for (size_t i = 0; i < given_count; i++) {
        if (!givens[i].is_upper) continue;
        graph->edges[graph->first[givens[i].a + 1]++] = (int32_t)i;
        graph->edges[graph->first[givens[i].b + 1]++] = (int32_t)i;
    }
    for (int32_t i = 0; i < n; i++) {
        graph->distance[i] = INFINITY;
        graph->place[i] = graph->via[i] = -1;
    }
    return true;
}

void tml_graph_close(tml_graph *graph) {
    free(graph->first);
    free(graph->edges);
    free(graph->distance);
    free(graph->via);
    free(graph->heap);
    free(graph->place);
    free(graph->touched);
    *graph = (tml_graph){0};
}

/* ---- a binary heap of atoms by distance ---- */

static void put(tml_graph *graph, int32_t at, int32_t atom) {
    graph->heap[at] = atom;
    graph->place[atom] = at;
}

static void rise(tml_graph *graph, int32_t atom) {
    int32_t at = graph->place[atom];
    while (at > 0 && graph->distance[graph->heap[(at - 1) / 2]] > graph->distance[atom]) {
        put(graph, at, graph->heap[(at - 1) / 2]);
        at = (at - 1) / 2;
    }
    put(graph, at, atom);
}

static int32_t take_nearest(tml_graph *graph) {
    int32_t nearest = graph->heap[0], last = graph->heap[--graph->heap_count], at = 0;
    graph->place[nearest] = -1;
    if (graph->heap_count == 0) return nearest;
    for (;;) {
        int32_t child = 2 * at + 1;
        if (child >= graph->heap_count) break;
        if (child + 1 < graph->heap_count && graph->distance[graph->heap[child + 1]] < graph->distance[graph->heap[child]]) child++;
        if (graph->distance[graph->heap[child]] >= graph->distance[last]) break;
        put(graph, at, graph->heap[child]);
        at = child;
    }
    put(graph, at, last);
    return nearest;
}

static void reach_atom(tml_graph *graph, int32_t atom, double distance, int32_t via) {
    if (isinf(graph->distance[atom])) {
        graph->touched[graph->touched_count++] = atom;
        put(graph, graph->heap_count++, atom);
    }
    graph->distance[atom] = distance;
    graph->via[atom] = via;
    rise(graph, atom);
}

void tml_graph_search(tml_graph *graph, int32_t source, double reach) {
    for (int32_t i = 0; i < graph->touched_count; i++) {
        graph->distance[graph->touched[i]] = INFINITY;
        graph->place[graph->touched[i]] = graph->via[graph->touched[i]] = -1;
    }
    graph->touched_count = graph->heap_count = 0;
    reach_atom(graph, source, 0, -1);
    while (graph->heap_count > 0) {
        int32_t here = take_nearest(graph);
        for (int32_t i = graph->first[here]; i < graph->first[here + 1]; i++) {
            const tml_given *edge = &graph->givens[graph->edges[i]];
            int32_t there = edge->a == here ? edge->b : edge->a;
            double distance = graph->distance[here] + edge->value;
            if (distance < graph->distance[there] && distance <= reach) reach_atom(graph, there, distance, graph->edges[i]);
        }
    }
}
