// One local optimisation of a beam expander with Ceres, timed around Solve alone.
//
//   expander PROBLEM TARGET REPEATS [OPTIONS...]
//
// PROBLEM is what `benchmarks peer-input DESIGN` writes. The solver stops once the merit (the sum of
// squares) is at or below TARGET; TARGET 0 runs to convergence. One line of JSON a set of options:
// {"options", "start", "merit", "iterations", "seconds": [one a repeat], "message"}.
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <algorithm>
#include <functional>
#include <limits>
#include <map>
#include <memory>

#include "ceres/ceres.h"
#include "state_cost.h"

namespace {

using Configure = std::function<void(ceres::Solver::Options*)>;

void Schur(ceres::Solver::Options* o) { o->linear_solver_type = ceres::DENSE_SCHUR; }
void Sparse(ceres::Solver::Options* o) { o->linear_solver_type = ceres::SPARSE_SCHUR; }
void Qr(ceres::Solver::Options* o) { o->linear_solver_type = ceres::DENSE_QR; }
void Cholesky(ceres::Solver::Options* o) { o->linear_solver_type = ceres::DENSE_NORMAL_CHOLESKY; }
void Nonmonotonic(ceres::Solver::Options* o) { Schur(o), o->use_nonmonotonic_steps = true; }
void Wide(ceres::Solver::Options* o) { Schur(o), o->initial_trust_region_radius = 1e8; }
void Inner(ceres::Solver::Options* o) { Schur(o), o->use_inner_iterations = true; }
void Dogleg(ceres::Solver::Options* o) {
  Schur(o);
  o->trust_region_strategy_type = ceres::DOGLEG;
  o->dogleg_type = ceres::SUBSPACE_DOGLEG;
}

// What is tried, each with its bounds and, in the peer's favour, without; the best of them is what
// a run is held against.
const std::map<std::string, Configure>& Configurations() {
  static const std::map<std::string, Configure> all = [] {
    std::map<std::string, Configure> plain = {
        {"dense-schur", Schur},   {"sparse-schur", Sparse},
        {"dense-qr", Qr},         {"dense-cholesky", Cholesky},
        {"nonmonotonic", Nonmonotonic}, {"wide", Wide},
        {"inner", Inner},         {"dogleg", Dogleg},
    };
    std::map<std::string, Configure> both = plain;
    for (const auto& [name, configure] : plain) both[name + "-unbounded"] = configure;
    return both;
  }();
  return all;
}

class StopAt : public ceres::IterationCallback {
 public:
  explicit StopAt(double target) : cost_(0.5 * target) {}
  ceres::CallbackReturnType operator()(const ceres::IterationSummary& summary) override {
    return summary.cost <= cost_ ? ceres::SOLVER_TERMINATE_SUCCESSFULLY : ceres::SOLVER_CONTINUE;
  }

 private:
  double cost_;
};

template <int kShared, int kOwn>
class Solving {
 public:
  explicit Solving(const Problem& problem) : problem_(problem) {
    shared_.resize(problem.shared.size());
    own_.resize(problem.states.size(), std::vector<double>(kOwn));
    for (size_t k = 0; k < problem.states.size(); ++k) {
      auto* cost = new ceres::AutoDiffCostFunction<StateCost, ceres::DYNAMIC, kShared, kOwn>(
          new StateCost(problem, static_cast<int>(k)),
          problem.states[k].rows(static_cast<int>(problem.heights.size())));
      ceres_.AddResidualBlock(cost, nullptr, shared_.data(), own_[k].data());
    }
    HoldSpacings();
  }

  void Run(const std::string& name, const Configure& configure, double target, int repeats) {
    std::vector<double> seconds;
    SetBounds(name.find("unbounded") == std::string::npos);
    ceres::Solver::Summary summary;
    for (int repeat = 0; repeat < repeats; ++repeat) {
      Restart();
      ceres::Solver::Options options;
      options.num_threads = 1;
      options.max_num_iterations = 5000;
      options.max_num_consecutive_invalid_steps = 50;
      options.function_tolerance = 1e-15;
      options.gradient_tolerance = 1e-16;
      options.parameter_tolerance = 1e-15;
      options.logging_type = ceres::SILENT;
      options.minimizer_progress_to_stdout = false;
      options.linear_solver_ordering = Ordering();
      StopAt stop(target);
      options.callbacks.push_back(&stop);
      configure(&options);
      if (options.linear_solver_type == ceres::DENSE_QR ||
          options.linear_solver_type == ceres::DENSE_NORMAL_CHOLESKY) {
        options.linear_solver_ordering.reset();
      }
      const auto began = std::chrono::steady_clock::now();
      ceres::Solve(options, &ceres_, &summary);
      seconds.push_back(
          std::chrono::duration<double>(std::chrono::steady_clock::now() - began).count());
    }
    std::string message = summary.message;
    for (char& c : message) {
      if (c == '"' || c == '\n' || c == '\\') c = ' ';
    }
    std::printf("{\"options\": \"%s\", \"start\": %.17g, \"merit\": %.17g, \"iterations\": %d, ",
                name.c_str(), 2 * summary.initial_cost, 2 * summary.final_cost,
                summary.num_successful_steps + summary.num_unsuccessful_steps);
    std::printf("\"seconds\": [");
    for (size_t i = 0; i < seconds.size(); ++i) std::printf(i ? ", %.9f" : "%.9f", seconds[i]);
    std::printf("], \"message\": \"%s\"}\n", message.c_str());
    std::fflush(stdout);
  }

 private:
  // A spacing that is not free stays where it is.
  void HoldSpacings() {
    for (size_t k = 0; k < own_.size(); ++k) {
      std::vector<int> held;
      for (int spacing = 0; spacing < kOwn; ++spacing) {
        const bool free = std::any_of(problem_.own.begin(), problem_.own.end(), [&](const Own& own) {
          return own.state == static_cast<int>(k) && own.spacing == spacing;
        });
        if (!free) held.push_back(spacing);
      }
      if (held.size() == kOwn) {
        ceres_.SetParameterBlockConstant(own_[k].data());
      } else if (!held.empty()) {
        ceres_.SetManifold(own_[k].data(), new ceres::SubsetManifold(kOwn, held));
      }
    }
  }

  void SetBounds(bool bounded) {
    const double infinity = std::numeric_limits<double>::infinity();
    const auto set = [&](double* block, int j, double low, double high) {
      ceres_.SetParameterLowerBound(block, j, bounded && low > -1e300 ? low : -infinity);
      ceres_.SetParameterUpperBound(block, j, bounded && high < 1e300 ? high : infinity);
    };
    for (size_t j = 0; j < problem_.shared.size(); ++j) {
      set(shared_.data(), static_cast<int>(j), problem_.shared[j].low, problem_.shared[j].high);
    }
    for (const Own& own : problem_.own) {
      set(own_[own.state].data(), own.spacing, own.low, own.high);
    }
  }

  void Restart() {
    for (size_t j = 0; j < problem_.shared.size(); ++j) {
      const Shared& variable = problem_.shared[j];
      shared_[j] = std::min(std::max(problem_.Start(variable), variable.low), variable.high);
    }
    for (size_t k = 0; k < own_.size(); ++k) {
      for (int j = 0; j < kOwn; ++j) own_[k][j] = problem_.states[k].spacings[j];
    }
    for (const Own& own : problem_.own) {
      double& spacing = own_[own.state][own.spacing];
      spacing = std::min(std::max(spacing, own.low), own.high);
    }
  }

  // The spacings of each state are eliminated first.
  std::shared_ptr<ceres::ParameterBlockOrdering> Ordering() {
    auto ordering = std::make_shared<ceres::ParameterBlockOrdering>();
    for (auto& own : own_) ordering->AddElementToGroup(own.data(), 0);
    ordering->AddElementToGroup(shared_.data(), 1);
    return ordering;
  }

  const Problem& problem_;
  std::vector<double> shared_;
  std::vector<std::vector<double>> own_;
  ceres::Problem ceres_;
};

template <int kShared, int kOwn>
bool Try(const Problem& problem, double target, int repeats, const std::vector<std::string>& names) {
  if (problem.shared.size() != kShared || problem.Spacings() != kOwn) return false;
  Solving<kShared, kOwn> solving(problem);
  for (const auto& [name, configure] : Configurations()) {
    const bool wanted = names.empty() || std::count(names.begin(), names.end(), name) > 0;
    if (wanted) solving.Run(name, configure, target, repeats);
  }
  return true;
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 4) {
    std::fprintf(stderr, "expander PROBLEM TARGET REPEATS [OPTIONS...]\n");
    return 2;
  }
  google::InitGoogleLogging(argv[0]);
  FLAGS_minloglevel = 3;
  std::ifstream in(argv[1]);
  const Problem problem = Read(in);
  if (!in) {
    std::fprintf(stderr, "%s does not hold a whole problem\n", argv[1]);
    return 1;
  }
  const double target = std::atof(argv[2]);
  const int repeats = std::atoi(argv[3]);
  const std::vector<std::string> names(argv + 4, argv + argc);
  // Block sizes are known when the program is built, as Ceres wants it for speed.
  const bool done = Try<6, 2>(problem, target, repeats, names) ||
                    Try<5, 2>(problem, target, repeats, names) ||
                    Try<6, 1>(problem, target, repeats, names) ||
                    Try<8, 2>(problem, target, repeats, names) ||
                    Try<9, 2>(problem, target, repeats, names) ||
                    Try<10, 2>(problem, target, repeats, names) ||
                    Try<12, 1>(problem, target, repeats, names);
  if (!done) {
    std::fprintf(stderr, "no instance for %zu shared variables and %d spacings\n",
                 problem.shared.size(), problem.Spacings());
    return 1;
  }
  return 0;
}
