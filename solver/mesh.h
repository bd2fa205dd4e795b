/* mesh.h: control volumes across a one-dimensional section, and the places on it.

   Vertex-centred: nodes at both surfaces, two nodes at every interface. Five nodes of two layers:

       surface                interface             surface
          0 ---- 1 ---- 2 | 3 ------- 4 ------- 5      (| : contact)
          [ V0 ][  V1  ][V2][  V3   ][    V4   ][V5]

   Between neighbours i and i+1 of one layer conductance[i] = 1/integral of dr/A(r), to be
   multiplied by the difference of the Kirchhoff potential; across an interface it is A/R,
   multiplied by the difference of T. Areas and volumes are per unit area (plate), per radian of a
   unit length (cylinder), per steradian (sphere). */
#ifndef CORESOAK_MESH_H
#define CORESOAK_MESH_H

#include "case.h"
#include "figure.h"

/* How fine: what `accuracy` chooses. */
typedef struct mesh_plan {
  int cells; /* of the whole section (of the half that symmetry leaves), shared out over the layers
              */
  int keep_every; /* 1: all nodes; 2: every second node, the coarse twin of the same mesh */
  const double (*end_cell)[2]; /* [layer of the case]: thickness wanted of its first and last cell,
                                  m; INFINITY: no wish */
  bool halved;                 /* plate: only the half from the front is computed */
} mesh_plan;

/* The largest conductance of an interface: R = 0 counts as 1e-8 m2.K/W. */
#define LARGEST_CONTACT_CONDUCTANCE 1e8

typedef struct mesh_layer {
  int first, last; /* nodes */
  int material;
  int layer; /* index in the case */
  const property *property;
  const series *generation;
  double start; /* K, NAN: the case's */
} mesh_layer;

typedef struct mesh {
  int nodes, layers, power;
  bool halved;        /* the body goes on as a mirror image behind the last node */
  bool middle_shared; /* halved inside a layer: the last node is its own mirror image */
  int whole_layers;   /* of the case */
  bool solid;         /* no inner face: first node is the axis or centre */
  double *position;   /* m: from front, or radius */
  double *volume;
  double *conductance; /* [nodes - 1] */
  bool *contact;       /* [nodes - 1]: an interface behind this node */
  double area[2];      /* of the first and last surface */
  double whole;        /* factor from one of these to the unit of the API: 1 (plate), 2 pi, 4 pi */
  mesh_layer *layer;
  double width; /* of the whole section, m (plate: thickness; else outer radius) */
} mesh;

/* Builds the mesh of a case. Layer i gets cells in proportion to its diffusion length, even in
   number, at least 4. `property` holds one table for each material of the case. Memory from the
   arena. */
MUST_USE status mesh_build(mesh *m, const heat_case *c, const mesh_plan *plan,
                           const property *properties, arena *memory, fault *f);

/* Where a place lies: weights of at most four nodes of one layer. */
typedef struct mesh_spot {
  int first, count;
  double weight[4];
  int low, high; /* bracketing nodes: the answer is kept between their values where the profile is
                    monotone */
} mesh_spot;

/* The spot of a location, mirrored if the mesh is halved. */
mesh_spot mesh_locate(const mesh *m, const location *at);

/* Value at a spot of nodal temperatures. */
double mesh_spot_value(const mesh_spot *spot, const double *temperature);

/* Index in mesh.layer of a layer of the case (its mirror image if the mesh is halved). */
int mesh_layer_of(const mesh *m, int layer);

/* Total volume of the nodes [first, last]. */
double mesh_volume(const mesh *m, int first, int last);

/* Nodes of the whole body: those of the mesh, and their mirror images if it is halved. */
int mesh_whole_nodes(const mesh *m);

#endif
