// The nodes and links that a drawing of the model shows.
#pragma once

#include <vector>

#include "diagnose/structure.hpp"
#include "sparse/matrix_family.hpp"
#include "stanchion/located.hpp"

namespace stanchion {

struct ModelPicture {
  Picture picture;
  std::vector<Index> at_node;  ///< node of the structure -> number in the picture, -1 for none
};

/// Every node with a place. Links are pairs with stiffness between them, without the diagonals of meshes (two
/// nodes that lie across from each other among common neighbours). A drawing thins them out (reduce_model).
ModelPicture make_picture(const Structure& structure, const ShiftedMatrix& matrix);

}  // namespace stanchion
