/*
 * Writes small CGNS files of every shape the reader must know, with the reference library:
 *   cc cgns-shapes.c -o cgns-shapes -lcgns && ./cgns-shapes FOLDER
 * All meshes fill the box [0, 2] x [0, 1] x [0, 1] unless said otherwise.
 */
#include <cgnslib.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define OK(call)                                                        \
  do {                                                                  \
    if (call) {                                                         \
      fprintf(stderr, "%d: %s\n", __LINE__, cg_get_error());            \
      exit(1);                                                          \
    }                                                                   \
  } while (0)

static const char *folder;

static int create(const char *name, int *base, int cell_dimension, int physical) {
  char path[1024];
  int file;
  snprintf(path, sizeof path, "%s/%s.cgns", folder, name);
  OK(cg_set_file_type(CG_FILE_HDF5));
  OK(cg_open(path, CG_MODE_WRITE, &file));
  OK(cg_base_write(file, "Base", cell_dimension, physical, base));
  return file;
}

static void si(int file, int base) {
  OK(cg_goto(file, base, "end"));
  OK(cg_dataclass_write(CGNS_ENUMV(Dimensional)));
  OK(cg_units_write(CGNS_ENUMV(Kilogram), CGNS_ENUMV(Meter), CGNS_ENUMV(Second), CGNS_ENUMV(Kelvin), CGNS_ENUMV(Radian)));
}

static void coordinates(int file, int base, int zone, const double *x, const double *y, const double *z) {
  int c;
  OK(cg_coord_write(file, base, zone, CGNS_ENUMV(RealDouble), "CoordinateX", x, &c));
  OK(cg_coord_write(file, base, zone, CGNS_ENUMV(RealDouble), "CoordinateY", y, &c));
  if (z) OK(cg_coord_write(file, base, zone, CGNS_ENUMV(RealDouble), "CoordinateZ", z, &c));
}

/* Lattice of (nx + 1)(ny + 1)(nz + 1) points on [x0, x0 + lx] x [0, 1] x [0, 1]. */
static void lattice(int nx, int ny, int nz, double x0, double lx, double *x, double *y, double *z) {
  int p = 0;
  for (int k = 0; k <= nz; k++)
    for (int j = 0; j <= ny; j++)
      for (int i = 0; i <= nx; i++, p++) {
        x[p] = x0 + lx * i / nx;
        y[p] = (double)j / ny;
        z[p] = (double)k / nz;
      }
}

/* Two structured zones in millimetres with 1-to-1 connection, families, periodic sides, rind cells. */
static void structured(void) {
  int base, zone, file = create("structured", &base, 3, 3), f, b, i;
  OK(cg_goto(file, base, "end"));
  OK(cg_dataclass_write(CGNS_ENUMV(Dimensional)));
  OK(cg_units_write(CGNS_ENUMV(Gram), CGNS_ENUMV(Millimeter), CGNS_ENUMV(Second), CGNS_ENUMV(Celsius), CGNS_ENUMV(Degree)));
  OK(cg_family_write(file, base, "hull", &f));
  OK(cg_fambc_write(file, base, f, "FamBC", CGNS_ENUMV(BCWallViscous), &b));
  OK(cg_descriptor_write("About", "written for a test"));
  for (int part = 0; part < 2; part++) {
    int nx = part ? 3 : 2, ny = 2, nz = 2, n = (nx + 1) * 9;
    cgsize_t size[9] = {nx + 1, 3, 3, nx, 2, 2, 0, 0, 0};
    double x[64], y[64], z[64];
    OK(cg_zone_write(file, base, part ? "right" : "left", size, CGNS_ENUMV(Structured), &zone));
    lattice(nx, ny, nz, part ? 1 : 0, 1, x, y, z);
    for (i = 0; i < n; i++) x[i] *= 1000, y[i] *= 1000, z[i] *= 1000;
    coordinates(file, base, zone, x, y, z);
    cgsize_t low[6] = {1, 1, 1, nx + 1, 1, 3}, high[6] = {1, 3, 1, nx + 1, 3, 3};
    OK(cg_boco_write(file, base, zone, "floor", CGNS_ENUMV(FamilySpecified), CGNS_ENUMV(PointRange), 2, low, &b));
    OK(cg_goto(file, base, "Zone_t", zone, "ZoneBC_t", 1, "BC_t", b, "end"));
    OK(cg_famname_write("hull"));
    OK(cg_boco_write(file, base, zone, "roof", CGNS_ENUMV(FamilySpecified), CGNS_ENUMV(PointRange), 2, high, &b));
    OK(cg_goto(file, base, "Zone_t", zone, "ZoneBC_t", 1, "BC_t", b, "end"));
    OK(cg_famname_write("hull"));
    if (!part) {
      cgsize_t faces[6] = {1, 1, 1, 1, 2, 2};
      OK(cg_boco_write(file, base, zone, "in", CGNS_ENUMV(BCInflow), CGNS_ENUMV(PointRange), 2, faces, &b));
      OK(cg_boco_gridlocation_write(file, base, zone, b, CGNS_ENUMV(IFaceCenter)));
    } else {
      cgsize_t list[27];
      int at = 0;
      for (int k = 1; k <= 3; k++)
        for (int j = 1; j <= 3; j++) list[at++] = nx + 1, list[at++] = j, list[at++] = k;
      OK(cg_boco_write(file, base, zone, "out", CGNS_ENUMV(BCOutflowSubsonic), CGNS_ENUMV(PointList), 9, list, &b));
    }
    int transform[3] = {1, 2, 3}, c;
    cgsize_t mine[6] = {part ? 1 : nx + 1, 1, 1, part ? 1 : nx + 1, 3, 3};
    cgsize_t theirs[6] = {part ? 3 : 1, 1, 1, part ? 3 : 1, 3, 3};
    OK(cg_1to1_write(file, base, zone, "join", part ? "left" : "right", mine, theirs, transform, &c));
    cgsize_t front[6] = {1, 1, 1, nx + 1, 3, 1}, back[6] = {1, 1, 3, nx + 1, 3, 3};
    float centre[3] = {0, 0, 0}, angle[3] = {0, 0, 0}, shift[3] = {0, 0, 1000}, unshift[3] = {0, 0, -1000};
    OK(cg_1to1_write(file, base, zone, "front", part ? "right" : "left", front, back, transform, &c));
    OK(cg_1to1_periodic_write(file, base, zone, c, centre, angle, shift));
    OK(cg_1to1_write(file, base, zone, "back", part ? "right" : "left", back, front, transform, &c));
    OK(cg_1to1_periodic_write(file, base, zone, c, centre, angle, unshift));
    /* Cell centres with one rind plane on either side of i. */
    int s, d, rind[6] = {1, 1, 0, 0, 0, 0};
    double p[32];
    for (i = 0; i < (nx + 2) * 4; i++) p[i] = i % (nx + 2) == 0 || i % (nx + 2) == nx + 1 ? -9 : 100 * part + (i / (nx + 2)) * nx + i % (nx + 2) - 1;
    OK(cg_sol_write(file, base, zone, "Cells", CGNS_ENUMV(CellCenter), &s));
    OK(cg_goto(file, base, "Zone_t", zone, "FlowSolution_t", s, "end"));
    OK(cg_rind_write(rind));
    OK(cg_field_write(file, base, zone, s, CGNS_ENUMV(RealDouble), "Pressure", p, &d));
    OK(cg_field_write(file, base, zone, s, CGNS_ENUMV(RealDouble), "Temperature", p, &d));
    OK(cg_field_write(file, base, zone, s, CGNS_ENUMV(RealDouble), "Marker", p, &d));
    OK(cg_sol_write(file, base, zone, "Points", CGNS_ENUMV(Vertex), &s));
    float v[64];
    for (i = 0; i < n; i++) v[i] = (float)x[i];
    OK(cg_field_write(file, base, zone, s, CGNS_ENUMV(RealSingle), "VelocityX", v, &d));
    OK(cg_goto(file, base, "Zone_t", zone, "FlowSolution_t", s, "DataArray_t", d, "end"));
    float exponents[5] = {0, 1, -1, 0, 0};
    OK(cg_exponents_write(CGNS_ENUMV(RealSingle), exponents));
  }
  OK(cg_close(file));
}

/* A hexahedron on [0, 1], then two wedges, then a pyramid and two tetrahedra beyond x = 1; corner lists from 1. */
static const double px[] = {0, 1, 1, 0, 0, 1, 1, 0, 2, 2, 2, 2};
static const double py[] = {0, 0, 1, 1, 0, 0, 1, 1, 0, 1, 0, 1};
static const double pz[] = {0, 0, 0, 0, 1, 1, 1, 1, 0, 0, 1, 1};
/* Points 9 (2,0,0), 10 (2,1,0), 11 (2,0,1), 12 (2,1,1). */
static const cgsize_t hexa[8] = {1, 2, 3, 4, 5, 6, 7, 8};
static const cgsize_t penta[6] = {2, 9, 3, 6, 11, 7};
static const cgsize_t pyra[5] = {3, 10, 12, 7, 9};
static const cgsize_t tetra[4] = {7, 9, 12, 11};
static const cgsize_t faces_in[4] = {1, 5, 8, 4};
static const cgsize_t tris_floor[8] = {1, 2, 6, 5, 2, 9, 11, 6};

static void solution(int file, int base, int zone, const char *name, CGNS_ENUMT(GridLocation_t) where, int n, const char *field, double first) {
  int s, d;
  double v[64];
  for (int i = 0; i < n; i++) v[i] = first + i;
  OK(cg_sol_write(file, base, zone, name, where, &s));
  OK(cg_field_write(file, base, zone, s, CGNS_ENUMV(RealDouble), field, v, &d));
}

static void conditions(int file, int base, int zone) {
  int b;
  cgsize_t in = 5, floor_range[2] = {6, 7}, points[4] = {9, 10, 11, 12};
  OK(cg_boco_write(file, base, zone, "in", CGNS_ENUMV(BCInflow), CGNS_ENUMV(PointList), 1, &in, &b));
  OK(cg_boco_gridlocation_write(file, base, zone, b, CGNS_ENUMV(FaceCenter)));
  OK(cg_boco_write(file, base, zone, "floor", CGNS_ENUMV(BCWall), CGNS_ENUMV(PointRange), 2, floor_range, &b));
  OK(cg_boco_gridlocation_write(file, base, zone, b, CGNS_ENUMV(FaceCenter)));
  OK(cg_boco_write(file, base, zone, "out", CGNS_ENUMV(BCOutflow), CGNS_ENUMV(PointList), 4, points, &b));
}

static void sections(void) {
  int base, zone, s, file = create("sections", &base, 3, 3);
  cgsize_t size[3] = {12, 4, 0};
  si(file, base);
  OK(cg_zone_write(file, base, "Zone", size, CGNS_ENUMV(Unstructured), &zone));
  coordinates(file, base, zone, px, py, pz);
  OK(cg_section_write(file, base, zone, "h", CGNS_ENUMV(HEXA_8), 1, 1, 0, hexa, &s));
  OK(cg_section_write(file, base, zone, "w", CGNS_ENUMV(PENTA_6), 2, 2, 0, penta, &s));
  OK(cg_section_write(file, base, zone, "p", CGNS_ENUMV(PYRA_5), 3, 3, 0, pyra, &s));
  OK(cg_section_write(file, base, zone, "t", CGNS_ENUMV(TETRA_4), 4, 4, 0, tetra, &s));
  OK(cg_section_write(file, base, zone, "qin", CGNS_ENUMV(QUAD_4), 5, 5, 0, faces_in, &s));
  OK(cg_section_write(file, base, zone, "qfloor", CGNS_ENUMV(QUAD_4), 6, 7, 0, tris_floor, &s));
  conditions(file, base, zone);
  solution(file, base, zone, "Cells", CGNS_ENUMV(CellCenter), 4, "Pressure", 10);
  solution(file, base, zone, "Points", CGNS_ENUMV(Vertex), 12, "Density", 1);
  OK(cg_close(file));
}

static void mixed(void) {
  int base, zone, s, file = create("mixed", &base, 3, 3), n = 0, e = 0;
  cgsize_t size[3] = {12, 4, 0}, list[64], starts[16];
  const struct { CGNS_ENUMT(ElementType_t) type; const cgsize_t *points; int count; } all[] = {
      {CGNS_ENUMV(HEXA_8), hexa, 8}, {CGNS_ENUMV(PENTA_6), penta, 6}, {CGNS_ENUMV(PYRA_5), pyra, 5}, {CGNS_ENUMV(TETRA_4), tetra, 4},
      {CGNS_ENUMV(QUAD_4), faces_in, 4}, {CGNS_ENUMV(QUAD_4), tris_floor, 4}, {CGNS_ENUMV(QUAD_4), tris_floor + 4, 4}};
  starts[0] = 0;
  for (e = 0; e < 7; e++) {
    list[n++] = all[e].type;
    for (int k = 0; k < all[e].count; k++) list[n++] = all[e].points[k];
    starts[e + 1] = n;
  }
  si(file, base);
  OK(cg_zone_write(file, base, "Zone", size, CGNS_ENUMV(Unstructured), &zone));
  coordinates(file, base, zone, px, py, pz);
  OK(cg_poly_section_write(file, base, zone, "m", CGNS_ENUMV(MIXED), 1, 7, 0, list, starts, &s));
  conditions(file, base, zone);
  solution(file, base, zone, "Cells", CGNS_ENUMV(CellCenter), 4, "Pressure", 10);
  solution(file, base, zone, "Points", CGNS_ENUMV(Vertex), 12, "Density", 1);
  OK(cg_close(file));
}

/* The same four cells as polyhedra; polygon normals point out of the first cell that has them. */
static const int polygons[][5] = {
    {4, 1, 4, 3, 2}, {4, 1, 2, 6, 5}, {4, 2, 3, 7, 6}, {4, 3, 4, 8, 7}, {4, 1, 5, 8, 4}, {4, 5, 6, 7, 8}, /* hexahedron 1..6 */
    {4, 2, 9, 11, 6}, {4, 9, 3, 7, 11}, {3, 2, 3, 9, 0}, {3, 6, 11, 7, 0},                                /* wedge 7..10 and -3 */
    {4, 3, 7, 12, 10}, {3, 3, 10, 9, 0}, {3, 10, 12, 9, 0}, {3, 12, 7, 9, 0},                              /* pyramid 11..14, with 15 */
    {3, 7, 3, 9, 0},                                                                                       /* pyramid 15 */
    {3, 9, 12, 11, 0}, {3, 12, 7, 11, 0}, {3, 7, 9, 11, 0}};                                               /* tetrahedron 16..18, -14 */

static void poly(int with_cells) {
  int base, zone, s, file = create(with_cells ? "polyhedra" : "parents", &base, 3, 3), n = 0;
  cgsize_t size[3] = {12, 4, 0}, list[128], starts[32], parents[36];
  si(file, base);
  OK(cg_zone_write(file, base, "Zone", size, CGNS_ENUMV(Unstructured), &zone));
  coordinates(file, base, zone, px, py, pz);
  starts[0] = 0;
  for (int f = 0; f < 18; f++) {
    for (int k = 1; k <= polygons[f][0]; k++) list[n++] = polygons[f][k];
    starts[f + 1] = n;
  }
  OK(cg_poly_section_write(file, base, zone, "faces", CGNS_ENUMV(NGON_n), 1, 18, 0, list, starts, &s));
  const cgsize_t cells[] = {1, 2, 3, 4, 5, 6, 7, 8, 9, 10, -3, 11, 12, 13, 14, 15, 16, 17, 18, -14};
  const cgsize_t ends[] = {0, 6, 11, 16, 20};
  if (with_cells) OK(cg_poly_section_write(file, base, zone, "cells", CGNS_ENUMV(NFACE_n), 19, 22, 0, cells, ends, &s));
  else {
    memset(parents, 0, sizeof parents);
    for (int c = 0; c < 4; c++)
      for (int i = ends[c]; i < ends[c + 1]; i++) parents[labs(cells[i]) - 1 + (cells[i] < 0 ? 18 : 0)] = 19 + c;
    OK(cg_parent_data_write(file, base, zone, s, parents));
  }
  int b;
  cgsize_t in = 5, floor_list[2] = {2, 7}, points[4] = {9, 10, 11, 12};
  OK(cg_boco_write(file, base, zone, "in", CGNS_ENUMV(BCInflow), CGNS_ENUMV(PointList), 1, &in, &b));
  OK(cg_boco_gridlocation_write(file, base, zone, b, CGNS_ENUMV(FaceCenter)));
  OK(cg_boco_write(file, base, zone, "floor", CGNS_ENUMV(BCWall), CGNS_ENUMV(PointList), 2, floor_list, &b));
  OK(cg_boco_gridlocation_write(file, base, zone, b, CGNS_ENUMV(FaceCenter)));
  OK(cg_boco_write(file, base, zone, "out", CGNS_ENUMV(BCOutflow), CGNS_ENUMV(PointList), 4, points, &b));
  solution(file, base, zone, "Cells", CGNS_ENUMV(CellCenter), 4, "Pressure", 10);
  solution(file, base, zone, "Points", CGNS_ENUMV(Vertex), 12, "Density", 1);
  OK(cg_close(file));
}

/*
 * One quadratic element of each type a zone; points follow the standard's figures: corners, edges, faces, centre.
 * Every point lies at the mean of the corners named here, so that the reader's order can be checked by position.
 */
struct quadratic {
  CGNS_ENUMT(ElementType_t) type;
  const char *name;
  int corners, nodes;
  const char *means[27];
};
static const struct quadratic quadratics[] = {
    {CGNS_ENUMV(TETRA_10), "TETRA_10", 4, 10, {"1", "2", "3", "4", "12", "23", "31", "14", "24", "34"}},
    {CGNS_ENUMV(PYRA_13), "PYRA_13", 5, 13, {"1", "2", "3", "4", "5", "12", "23", "34", "41", "15", "25", "35", "45"}},
    {CGNS_ENUMV(PYRA_14), "PYRA_14", 5, 14, {"1", "2", "3", "4", "5", "12", "23", "34", "41", "15", "25", "35", "45", "1234"}},
    {CGNS_ENUMV(PENTA_15), "PENTA_15", 6, 15, {"1", "2", "3", "4", "5", "6", "12", "23", "31", "14", "25", "36", "45", "56", "64"}},
    {CGNS_ENUMV(PENTA_18), "PENTA_18", 6, 18, {"1", "2", "3", "4", "5", "6", "12", "23", "31", "14", "25", "36", "45", "56", "64", "1254", "2365", "3146"}},
    {CGNS_ENUMV(HEXA_20), "HEXA_20", 8, 20, {"1", "2", "3", "4", "5", "6", "7", "8", "12", "23", "34", "41", "15", "26", "37", "48", "56", "67", "78", "85"}},
    {CGNS_ENUMV(HEXA_27), "HEXA_27", 8, 27, {"1", "2", "3", "4", "5", "6", "7", "8", "12", "23", "34", "41", "15", "26", "37", "48", "56", "67", "78", "85", "1432", "1265", "2376", "3487", "1584", "5678", "12345678"}}};

static void quadratic(void) {
  int base, zone, s, file = create("quadratic", &base, 3, 3);
  static const double cx[4][8] = {{0, 1, 0, 0}, {0, 1, 1, 0, .5}, {0, 1, 0, 0, 1, 0}, {0, 1, 1, 0, 0, 1, 1, 0}};
  static const double cy[4][8] = {{0, 0, 1, 0}, {0, 0, 1, 1, .5}, {0, 0, 1, 0, 0, 1}, {0, 0, 1, 1, 0, 0, 1, 1}};
  static const double cz[4][8] = {{0, 0, 0, 1}, {0, 0, 0, 0, 1}, {0, 0, 0, 1, 1, 1}, {0, 0, 0, 0, 1, 1, 1, 1}};
  si(file, base);
  for (int q = 0; q < 7; q++) {
    const struct quadratic *e = &quadratics[q];
    int shape = e->corners == 8 ? 3 : e->corners - 4;
    double x[27], y[27], z[27];
    cgsize_t list[27], size[3] = {e->nodes, 1, 0};
    for (int n = 0; n < e->nodes; n++) {
      int m = (int)strlen(e->means[n]);
      x[n] = y[n] = z[n] = 0;
      list[n] = n + 1;
      for (int k = 0; k < m; k++) {
        int c = e->means[n][k] - '1';
        x[n] += cx[shape][c] / m, y[n] += cy[shape][c] / m, z[n] += cz[shape][c] / m;
      }
      x[n] += 3 * q;
    }
    OK(cg_zone_write(file, base, e->name, size, CGNS_ENUMV(Unstructured), &zone));
    coordinates(file, base, zone, x, y, z);
    OK(cg_section_write(file, base, zone, "one", e->type, 1, 1, 0, list, &s));
  }
  OK(cg_close(file));
}

/* Single precision, no units, velocities normalised by a known reference, three instants. */
static void series(void) {
  int base, zone, s, d, c, file = create("series", &base, 3, 3);
  cgsize_t size[9] = {3, 2, 2, 2, 1, 1, 0, 0, 0};
  double x[12], y[12], z[12], times[3] = {0.5, 1.0, 1.5};
  float single[12];
  OK(cg_zone_write(file, base, "Zone", size, CGNS_ENUMV(Structured), &zone));
  lattice(2, 1, 1, 0, 2, x, y, z);
  const double *axes[3] = {x, y, z};
  const char *names[3] = {"CoordinateX", "CoordinateY", "CoordinateZ"};
  for (int a = 0; a < 3; a++) {
    for (int i = 0; i < 12; i++) single[i] = (float)axes[a][i];
    OK(cg_coord_write(file, base, zone, CGNS_ENUMV(RealSingle), names[a], single, &c));
  }
  char pointers[3 * 32];
  memset(pointers, ' ', sizeof pointers);
  for (int t = 0; t < 3; t++) {
    char name[33];
    double u[2] = {t + 0.25, t + 0.75};
    snprintf(name, sizeof name, "State%d", t + 1);
    memcpy(pointers + 32 * t, name, strlen(name));
    OK(cg_sol_write(file, base, zone, name, CGNS_ENUMV(CellCenter), &s));
    OK(cg_field_write(file, base, zone, s, CGNS_ENUMV(RealDouble), "VelocityX", u, &d));
    OK(cg_goto(file, base, "Zone_t", zone, "FlowSolution_t", s, "DataArray_t", d, "end"));
    double conversion[2] = {20, 3};
    float exponents[5] = {0, 1, -1, 0, 0};
    OK(cg_dataclass_write(CGNS_ENUMV(NormalizedByDimensional)));
    OK(cg_conversion_write(CGNS_ENUMV(RealDouble), conversion));
    OK(cg_units_write(CGNS_ENUMV(Slug), CGNS_ENUMV(Foot), CGNS_ENUMV(Second), CGNS_ENUMV(Rankine), CGNS_ENUMV(Radian)));
    OK(cg_exponents_write(CGNS_ENUMV(RealSingle), exponents));
    int marks[2] = {7 + t, 8 + t};
    OK(cg_field_write(file, base, zone, s, CGNS_ENUMV(Integer), "Marker", marks, &d));
  }
  OK(cg_biter_write(file, base, "Series", 3));
  cgsize_t three = 3, names_size[2] = {32, 3};
  OK(cg_goto(file, base, "BaseIterativeData_t", 1, "end"));
  OK(cg_array_write("TimeValues", CGNS_ENUMV(RealDouble), 1, &three, times));
  OK(cg_ziter_write(file, base, zone, "Pointers"));
  OK(cg_goto(file, base, "Zone_t", zone, "ZoneIterativeData_t", 1, "end"));
  OK(cg_array_write("FlowSolutionPointers", CGNS_ENUMV(Character), 2, names_size, pointers));
  OK(cg_simulation_type_write(file, base, CGNS_ENUMV(TimeAccurate)));
  OK(cg_close(file));
}

/* Links to the coordinates and sections of another file, to a zone of it, to nothing, and in a circle. */
static void links(void) {
  int base, zone, file = create("links", &base, 3, 3);
  cgsize_t size[3] = {12, 4, 0};
  si(file, base);
  OK(cg_zone_write(file, base, "Zone", size, CGNS_ENUMV(Unstructured), &zone));
  OK(cg_goto(file, base, "Zone_t", zone, "end"));
  OK(cg_link_write("GridCoordinates", "sections.cgns", "/Base/Zone/GridCoordinates"));
  const char *names[] = {"h", "w", "p", "t", "qin", "qfloor"};
  for (int i = 0; i < 6; i++) {
    char path[64];
    snprintf(path, sizeof path, "/Base/Zone/%s", names[i]);
    OK(cg_link_write(names[i], "sections.cgns", path));
  }
  conditions(file, base, zone);
  OK(cg_link_write("Cells", "", "/Base/Zone/Own"));
  solution(file, base, zone, "Own", CGNS_ENUMV(CellCenter), 4, "Pressure", 10);
  OK(cg_close(file));

  file = create("linked-zone", &base, 3, 3);
  si(file, base);
  OK(cg_goto(file, base, "end"));
  OK(cg_link_write("Zone", "sections.cgns", "/Base/Zone"));
  OK(cg_close(file));

  file = create("broken-link", &base, 3, 3);
  OK(cg_goto(file, base, "end"));
  OK(cg_link_write("Zone", "nowhere.cgns", "/Base/Zone"));
  OK(cg_close(file));

  file = create("circle", &base, 3, 3);
  OK(cg_goto(file, base, "end"));
  OK(cg_link_write("Zone", "circle.cgns", "/Base"));
  OK(cg_close(file));
}

/* A surface of triangles and quadrilaterals in the plane (two coordinates), and a base of lines beside it. */
static void plane(void) {
  int base, zone, s, file = create("plane", &base, 2, 2);
  cgsize_t size[3] = {5, 2, 0}, quad[4] = {1, 2, 3, 4}, tri[3] = {2, 5, 3};
  double x[] = {0, 1, 1, 0, 2}, y[] = {0, 0, 1, 1, 0.5};
  si(file, base);
  OK(cg_zone_write(file, base, "Zone", size, CGNS_ENUMV(Unstructured), &zone));
  coordinates(file, base, zone, x, y, NULL);
  OK(cg_section_write(file, base, zone, "q", CGNS_ENUMV(QUAD_4), 1, 1, 0, quad, &s));
  OK(cg_section_write(file, base, zone, "t", CGNS_ENUMV(TRI_3), 2, 2, 0, tri, &s));
  solution(file, base, zone, "Cells", CGNS_ENUMV(CellCenter), 2, "Pressure", 1);
  OK(cg_close(file));
}

int main(int count, char **arguments) {
  if (count != 2) return 2;
  folder = arguments[1];
  structured();
  sections();
  mixed();
  poly(1);
  poly(0);
  quadratic();
  series();
  links();
  plane();
  return 0;
}
