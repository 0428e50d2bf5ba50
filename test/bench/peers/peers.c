/* How fast are general-purpose native solvers on the same matrix?
   usage: peers FILE REPEATS WHAT...   WHAT = mumps-scotch | mumps-metis | umfpack | cholmod-metis
   FILE: int32 n, int32 0, int64 count, then count × int32 rows, count × int32 columns (lower triangle, from 0),
   count × 2 float64 values. Prints one JSON line a repeat.
   cc -O2 peers.c -o peers -I/usr/include/suitesparse -lzmumps_seq -lumfpack -lcholmod -lm */
#include <cholmod.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <time.h>
#include <umfpack.h>
#include <zmumps_c.h>

static double cpu(void) {
  struct rusage r;
  getrusage(RUSAGE_SELF, &r);
  return r.ru_utime.tv_sec + r.ru_stime.tv_sec + 1e-6 * (r.ru_utime.tv_usec + r.ru_stime.tv_usec);
}
static double wall(void) {
  struct timespec t;
  clock_gettime(CLOCK_MONOTONIC, &t);
  return t.tv_sec + 1e-9 * t.tv_nsec;
}
/* kB; ru_maxrss would count what the parent held before exec. */
static long peak(void) {
  char line[256];
  long kb = 0;
  FILE *f = fopen("/proc/self/status", "r");
  while (f && fgets(line, sizeof line, f))
    if (sscanf(line, "VmHWM: %ld", &kb) == 1) break;
  if (f) fclose(f);
  return kb;
}

static int n;
static int64_t count;
static int *rows, *columns;
static double *values;

static void mumps(const char *name, int ordering, int repeats) {
  ZMUMPS_STRUC_C id;
  memset(&id, 0, sizeof id);
  id.par = 1;
  id.sym = 2;
  id.job = -1;
  id.comm_fortran = -987654;
  zmumps_c(&id);
  id.icntl[0] = id.icntl[1] = id.icntl[2] = -1;
  id.icntl[3] = 0;
  id.icntl[6] = ordering;
  int *i1 = malloc(sizeof(int) * count), *j1 = malloc(sizeof(int) * count);
  for (int64_t t = 0; t < count; t++) i1[t] = rows[t] + 1, j1[t] = columns[t] + 1;
  id.n = n;
  id.nnz = count;
  id.irn = i1;
  id.jcn = j1;
  id.a = (ZMUMPS_COMPLEX *)values;
  double t0 = cpu();
  id.job = 1;
  zmumps_c(&id);
  double analysis = cpu() - t0;
  for (int r = 0; r < repeats; r++) {
    double c0 = cpu(), w0 = wall();
    id.job = 2;
    zmumps_c(&id);
    double c = cpu() - c0, w = wall() - w0;
    double s0 = cpu();
    double *b = calloc(2 * (size_t)n, sizeof(double));
    for (int i = 0; i < n; i++) b[2 * i] = 1;
    id.nrhs = 1;
    id.lrhs = n;
    id.rhs = (ZMUMPS_COMPLEX *)b;
    id.job = 3;
    zmumps_c(&id);
    double s = cpu() - s0;
    free(b);
    printf("{\"what\":\"%s\",\"factor\":%.4f,\"wall\":%.4f,\"solve\":%.4f,\"analysis\":%.3f,\"flops\":%.6g,\"entries\":%d,"
           "\"status\":%d,\"used\":%d,\"peak\":%ld}\n",
           name, c, w, s, analysis, id.rinfog[2], id.infog[28], id.infog[0], id.infog[7], peak());
    fflush(stdout);
  }
  id.job = -2;
  zmumps_c(&id);
}

static void umfpack(int repeats) {
  int64_t full = 0;
  for (int64_t t = 0; t < count; t++) full += rows[t] == columns[t] ? 1 : 2;
  int *ti = malloc(sizeof(int) * full), *tj = malloc(sizeof(int) * full), *ap = malloc(sizeof(int) * (n + 1)), *ai = malloc(sizeof(int) * full);
  double *tx = malloc(sizeof(double) * 2 * full), *ax = malloc(sizeof(double) * 2 * full);
  int64_t q = 0;
  for (int64_t t = 0; t < count; t++)
    for (int flip = 0; flip < (rows[t] == columns[t] ? 1 : 2); flip++, q++) {
      ti[q] = flip ? columns[t] : rows[t];
      tj[q] = flip ? rows[t] : columns[t];
      tx[2 * q] = values[2 * t];
      tx[2 * q + 1] = values[2 * t + 1];
    }
  umfpack_zi_triplet_to_col(n, n, full, ti, tj, tx, NULL, ap, ai, ax, NULL, NULL);
  double control[UMFPACK_CONTROL], info[UMFPACK_INFO];
  umfpack_zi_defaults(control);
  control[UMFPACK_ORDERING] = UMFPACK_ORDERING_METIS;
  void *symbolic = NULL, *numeric = NULL;
  double a0 = cpu();
  umfpack_zi_symbolic(n, n, ap, ai, ax, NULL, &symbolic, control, info);
  double analysis = cpu() - a0;
  for (int r = 0; r < repeats; r++) {
    double c0 = cpu(), w0 = wall();
    int status = umfpack_zi_numeric(ap, ai, ax, NULL, symbolic, &numeric, control, info);
    double c = cpu() - c0, w = wall() - w0;
    printf("{\"what\":\"umfpack\",\"factor\":%.4f,\"wall\":%.4f,\"analysis\":%.3f,\"flops\":%.6g,\"entries\":%.0f,\"status\":%d,\"peak\":%ld}\n",
           c, w, analysis, info[UMFPACK_FLOPS], info[UMFPACK_LNZ] + info[UMFPACK_UNZ], status, peak());
    fflush(stdout);
    umfpack_zi_free_numeric(&numeric);
  }
}

/* Symbolic only: what METIS's ordering costs a scalar Cholesky factorization. */
static void cholmod(void) {
  cholmod_common common;
  cholmod_start(&common);
  cholmod_triplet *t = cholmod_allocate_triplet(n, n, count, -1, CHOLMOD_PATTERN, &common);
  memcpy(t->i, rows, sizeof(int) * count);
  memcpy(t->j, columns, sizeof(int) * count);
  t->nnz = count;
  cholmod_sparse *a = cholmod_triplet_to_sparse(t, count, &common);
  common.nmethods = 1;
  common.method[0].ordering = CHOLMOD_METIS;
  common.postorder = 1;
  double a0 = cpu();
  cholmod_factor *f = cholmod_analyze(a, &common);
  printf("{\"what\":\"cholmod-metis\",\"analysis\":%.3f,\"flops\":%.6g,\"entries\":%.6g}\n", cpu() - a0, 4 * common.fl, common.lnz);
  cholmod_free_factor(&f, &common);
}

int main(int argc, char **argv) {
  FILE *f = fopen(argv[1], "rb");
  int head[2];
  if (!f || fread(head, 4, 2, f) != 2 || fread(&count, 8, 1, f) != 1) return 2;
  n = head[0];
  rows = malloc(4 * count);
  columns = malloc(4 * count);
  values = malloc(16 * count);
  if (fread(rows, 4, count, f) != (size_t)count || fread(columns, 4, count, f) != (size_t)count ||
      fread(values, 16, count, f) != (size_t)count)
    return 2;
  fclose(f);
  int repeats = atoi(argv[2]);
  for (int i = 3; i < argc; i++) {
    if (!strcmp(argv[i], "mumps-scotch")) mumps(argv[i], 3, repeats);
    if (!strcmp(argv[i], "mumps-metis")) mumps(argv[i], 5, repeats);
    if (!strcmp(argv[i], "umfpack")) umfpack(repeats);
    if (!strcmp(argv[i], "cholmod-metis")) cholmod();
  }
  return 0;
}
