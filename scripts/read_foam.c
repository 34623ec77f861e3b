/* Read a foam skeleton from its CSV tables, print its counts, and check that d1 d2 = 0.
 *
 *     dualize export FOAM --as tables -o tables
 *     cc -O2 -o read_foam scripts/read_foam.c && ./read_foam tables
 *
 * Along the boundary of a face, the signed edges plus (for an external face) its link, every vertex and every
 * node must be entered as often as it is left.  Exit status: 0 good, 1 violated, 2 not readable.
 */
#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

typedef struct {
    long rows, columns;
    char header[4096];
    int64_t *entry; /* row by row */
} Table;

static void stop(const char *file, const char *why) {
    fprintf(stderr, "error: %s (%s)\n", why, file);
    exit(2);
}

static Table read_table(const char *folder, const char *name) {
    char path[4096], line[65536];
    Table t = {0, 1, "", NULL};
    long room = 0;
    if (snprintf(path, sizeof path, "%s/%s", folder, name) >= (int)sizeof path) stop(folder, "the name is too long");
    FILE *file = fopen(path, "r");
    if (!file || !fgets(t.header, sizeof t.header, file)) stop(path, "the table cannot be read");
    t.header[strcspn(t.header, "\r\n")] = 0;
    for (const char *c = t.header; *c; c++) t.columns += *c == ',';
    while (fgets(line, sizeof line, file)) {
        if (t.rows == room) {
            room = room ? 2 * room : 1024;
            t.entry = realloc(t.entry, (size_t)room * (size_t)t.columns * sizeof *t.entry);
            if (!t.entry) stop(path, "there is not enough memory");
        }
        char *at = line, *end;
        for (long k = 0; k < t.columns; k++, at = end + 1) {
            t.entry[t.rows * t.columns + k] = strtoll(at, &end, 10);
            if (end == at || (k + 1 < t.columns && *end != ',')) stop(path, "an entry is no integer");
        }
        t.rows++;
    }
    fclose(file);
    return t;
}

/* The number of a column by its name in the header. */
static long column(const Table *t, const char *name) {
    size_t n = strlen(name);
    long k = 0;
    for (const char *at = t->header; at; at = strchr(at, ','), at = at ? at + 1 : NULL, k++)
        if (!strncmp(at, name, n) && (at[n] == ',' || !at[n])) return k;
    stop(name, "there is no such column");
    return -1;
}

static int64_t get(const Table *t, long row, long k) { return t->entry[row * t->columns + k]; }

static int64_t in_range(int64_t x, int64_t n, const char *what) {
    if (x < 0 || x >= n) stop(what, "a number is out of range");
    return x;
}

int main(int argc, char **argv) {
    if (argc != 2) {
        fprintf(stderr, "usage: read_foam DIRECTORY\n");
        return 2;
    }
    Table vertices = read_table(argv[1], "vertices.csv"), edges = read_table(argv[1], "edges.csv");
    Table faces = read_table(argv[1], "faces.csv"), steps = read_table(argv[1], "face_edges.csv");
    Table nodes = read_table(argv[1], "nodes.csv"), links = read_table(argv[1], "links.csv");
    long internal = faces.rows - links.rows;
    printf("vertices %ld\nedges %ld + %ld\nfaces %ld + %ld\nnodes %ld\nlinks %ld\n", vertices.rows,
           edges.rows - nodes.rows, nodes.rows, internal, links.rows, nodes.rows, links.rows);

    /* an end of an edge is (vertex, slot) or (-1, node); nodes are numbered after the vertices */
    long cells = vertices.rows + nodes.rows, violated = 0, longest = 0;
    long source = column(&edges, "source.0"), target = column(&edges, "target.0");
    long begin = column(&faces, "edge_offsets"), edge = column(&steps, "edge"), sign = column(&steps, "edge_sign");
    long from = column(&links, "source"), to = column(&links, "target"), of = column(&links, "face");
    int64_t *balance = calloc((size_t)cells, sizeof *balance);
    if (!balance) stop(argv[1], "there is not enough memory");
    for (long f = 0; f < faces.rows; f++) {
        int64_t first = get(&faces, f, begin), last = f + 1 < faces.rows ? get(&faces, f + 1, begin) : steps.rows;
        if (first < 0 || last < first || last > steps.rows) stop("faces.csv", "an offset is out of range");
        if (last - first > longest) longest = last - first;
        for (int pass = 0; pass < 2; pass++) { /* add up; then look, and clear for the next face */
            for (int64_t s = first; s < last; s++) {
                long e = in_range(get(&steps, s, edge), edges.rows, "face_edges.csv");
                for (int end = 0; end < 2; end++) {
                    long where = end ? target : source;
                    int64_t v = get(&edges, e, where), n = get(&edges, e, where + 1);
                    v = in_range(v >= 0 ? v : vertices.rows + n, cells, "edges.csv");
                    if (pass == 0) balance[v] += (end ? 1 : -1) * get(&steps, s, sign);
                    else violated += balance[v] != 0, balance[v] = 0;
                }
            }
            if (f < internal) continue;
            long l = f - internal;
            if (get(&links, l, of) != f) stop("links.csv", "a link has another external face");
            int64_t a = vertices.rows + in_range(get(&links, l, from), nodes.rows, "links.csv");
            int64_t b = vertices.rows + in_range(get(&links, l, to), nodes.rows, "links.csv");
            if (pass == 0) balance[a]--, balance[b]++;
            else violated += (balance[a] != 0) + (balance[b] != 0), balance[a] = balance[b] = 0;
        }
    }
    printf("longest face %ld edges\nd1 d2 = 0 %s\n", longest, violated ? "violated" : "holds");
    return violated ? 1 : 0;
}
