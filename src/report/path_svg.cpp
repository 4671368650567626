#include <fmt/format.h>

#include <algorithm>

#include "model/numbers.hpp"
#include "report/answer_svg.hpp"
#include "report/chart.hpp"

namespace stanchion {
namespace {

constexpr double kTop = 62;
constexpr const char* kSquare = "M-4.5-4.5H4.5V4.5H-4.5Z";
constexpr const char* kOpen = "M-5-9H5V9H-5Z";

class PathChart {
 public:
  PathChart(const PathOutcome& path, ChartWidth width)
      : path_(path),
        base_(kTop + (none_open(path) ? 60 : 190)),
        chart_(width, base_ + 62, "Directions that are not positive, by step", 1,
               static_cast<double>(path.steps.size())) {
    for (const PathStep& step : path.steps) {
      if (known(step)) most_ = std::max(most_, step.inertia.negative + step.inertia.zero);
    }
  }

  std::string draw() {
    counts();
    for (std::size_t k = 0; k < path_.steps.size(); ++k) {
      if (k > 0) between(k);
    }
    for (std::size_t k = 0; k < path_.steps.size(); ++k) step(k);
    firsts();
    chart_.axis(base_,
                "step; disc: negative directions; square: with the zero ones; hatched: changes somewhere "
                "in there",
                true);
    return chart_.done();
  }

 private:
  static bool none_open(const PathOutcome& path) {
    return std::all_of(path.steps.begin(), path.steps.end(), [](const PathStep& step) {
      return known(step) && step.inertia.negative == 0 && step.inertia.zero == 0;
    });
  }
  static bool known(const PathStep& step) { return step.inertia.undecided == 0; }
  double x(std::size_t k) const { return chart_.x(static_cast<double>(k) + 1); }
  double y(Index count) const { return base_ - (base_ - kTop) * count / std::max<double>(most_, 1); }

  void counts() {
    const auto step = static_cast<Index>(std::max(1.0, tick_step(std::max<double>(most_, 1), 5)));
    for (Index count = 0; count <= most_; count += step) {
      chart_.line(Chart::kLeft, y(count), chart_.width() - Chart::kRight, y(count), "s-rule");
      chart_.text(Chart::kLeft - 16, y(count) + 4, "end", grouped(count));
    }
    chart_.text(Chart::kLeft - 16, kTop - 18, "end", "directions");
  }

  void between(std::size_t k) {
    const PathStep &a = path_.steps[k - 1], &b = path_.steps[k];
    if (!known(a) || !known(b)) return;
    if (a.inertia.negative == b.inertia.negative) {
      chart_.line(x(k - 1), y(a.inertia.negative), x(k), y(b.inertia.negative), "s-step");
    } else {
      const auto [least, most] = std::minmax(a.inertia.negative, b.inertia.negative);
      chart_.rectangle(x(k - 1), y(most), x(k), y(least), "c-more",
                       fmt::format("{} negative at step {}, {} at step {}", a.inertia.negative, k,
                                   b.inertia.negative, k + 1),
                       "hatch");
    }
  }

  void step(std::size_t k) {
    const PathStep& one = path_.steps[k];
    if (!known(one)) {
      chart_.mark(x(k), base_ - 14, kOpen, "c-open", fmt::format("step {}: undecided", k + 1));
      chart_.text(x(k), base_ - 10, "middle", "?");
      return;
    }
    const std::string title = fmt::format("step {}: {} negative, {} zero", k + 1,
                                          grouped(one.inertia.negative), grouped(one.inertia.zero));
    if (one.inertia.zero > 0) {
      const Index together = one.inertia.negative + one.inertia.zero;
      chart_.line(x(k), y(one.inertia.negative), x(k), y(together), "c-level");
      chart_.mark(x(k), y(together), kSquare, "c-found", title);
    }
    chart_.mark(x(k), y(one.inertia.negative), Chart::kDisc, "s-point", title);
  }

  void firsts() {
    LabelLayout layout({4, 4, chart_.width() - 4, kTop - 12});
    layout.keep_clear({0, kTop - 32, Chart::kLeft - 10, kTop - 12});  // the name of the other axis
    const auto at = [&](Index number, const std::string& words) {
      chart_.name(layout, x(static_cast<std::size_t>(number) - 1), kTop - 12, 60, words, base_);
    };
    if (!path_.first_not_definite)
      chart_.text((Chart::kLeft + chart_.width() - Chart::kRight) / 2, kTop - 12, "middle",
                  fmt::format("all {} steps are positive definite", path_.steps.size()), "c-strong");
    if (path_.first_negative)
      at(*path_.first_negative, fmt::format("first negative direction: step {}", *path_.first_negative));
    if (path_.first_not_definite && path_.first_not_definite != path_.first_negative)
      at(*path_.first_not_definite, fmt::format("not positive definite: step {}", *path_.first_not_definite));
  }

  const PathOutcome& path_;
  double base_;
  Chart chart_;
  Index most_ = 0;
};

}  // namespace

std::string path_svg(const Outcome& outcome, ChartWidth width) {
  if (!outcome.path || outcome.path->steps.size() < 2) return "";
  return PathChart(*outcome.path, width).draw();
}

}  // namespace stanchion
