#include "model/not_checked.hpp"

namespace stanchion {
namespace {

constexpr const char* kNoLoad =
    "Stability under load: K alone, definite or not, says nothing about buckling. That needs the geometric "
    "stiffness G of the load (count --geometric G, or check with --add G:factor).";
constexpr const char* kOnlyAddedLoad =
    "Other loads: the verdict holds for the sum of exactly the matrices and factors given, for no other load "
    "and no other factor.";
constexpr const char* kLinearPath =
    "The path to the load: the factors are those of the straight line K + f G, with both matrices as given; "
    "how K and G change on the way to the load is not in them.";
constexpr const char* kSymmetricPart =
    "The part of the matrix that is not symmetric: only (K + K^T)/2 was judged. If it is definite, "
    "divergence "
    "is excluded but flutter is not; if it is indefinite, neither is shown.";
constexpr const char* kMixedUnits =
    "Units: shifts of K alone are in the mixed units of K (force per length beside moment per radian), so "
    "they do not compare between models with other units.";
constexpr const char* kResolution =
    "The sign of what is called zero: zero directions are statements at the resolution, eigenvalues of the "
    "scaled matrix that close to zero, of either sign.";
constexpr const char* kExactNumbers =
    "The digits that were not written: the numbers count as exact. With --digits d their rounding joins the "
    "error bound.";
constexpr const char* kModel =
    "The model: the statement is about the numbers in the files. Whether they describe the structure (its "
    "supports, connections, sections, materials, loads and units) is not examined.";
constexpr const char* kOutside =
    "Follower loads, contact, imperfections and yielding: these are outside of what symmetric matrices of "
    "one "
    "state can tell.";
constexpr const char* kPractice =
    "Adequacy: the verdict defers to licensed practice and to the codes in force where the structure stands.";
constexpr const char* kBetweenSteps =
    "What happens between two steps of the load path: a direction that turns negative and back again between "
    "two of the "
    "matrices is not seen, nor is a snap to another path.";
constexpr const char* kListedShapes =
    "Mode shapes that belong to the list: only the numbers were audited, and only those in the range.";
constexpr const char* kForecastOnly =
    "Everything numerical: only the pattern of the matrix was looked at, and nothing was factored. Delayed "
    "pivots can raise work and memory above the forecast.";

}  // namespace

constexpr const char* kCauses =
    "Causes: they are read from shapes and entries of the matrix alone. Whether the remedy named fits the "
    "structure is "
    "for its engineer to say.";

std::vector<std::string> not_checked(const Request& request, Question question) {
  if (question == Question::kForecast) return {kForecastOnly};
  std::vector<std::string> sentences;
  const bool one_matrix = request.pencil == Pencil::kStiffness || question == Question::kLocate;
  if (request.pencil == Pencil::kGeometric) {
    sentences.emplace_back(kLinearPath);
  } else if (one_matrix) {
    sentences.emplace_back(request.input.added.empty() ? kNoLoad : kOnlyAddedLoad);
  }
  if (request.input.symmetric_part) sentences.emplace_back(kSymmetricPart);
  if (question == Question::kCheck && !request.steps.empty()) sentences.emplace_back(kBetweenSteps);
  if (question == Question::kAudit) sentences.emplace_back(kListedShapes);
  if (question != Question::kCheck && request.pencil == Pencil::kStiffness)
    sentences.emplace_back(kMixedUnits);
  if (question == Question::kCheck || question == Question::kLocate) sentences.emplace_back(kResolution);
  if (question == Question::kLocate || request.want_location) sentences.emplace_back(kCauses);
  if (!request.digits) sentences.emplace_back(kExactNumbers);
  for (const char* sentence : {kModel, kOutside, kPractice}) sentences.emplace_back(sentence);
  return sentences;
}

}  // namespace stanchion
