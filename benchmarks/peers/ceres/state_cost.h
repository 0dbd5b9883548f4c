// Residuals of one zoom state, for values and for ceres::Jet.
#ifndef STATE_COST_H
#define STATE_COST_H

#include <cmath>

#include "ceres/jet.h"
#include "problem.h"

inline double Value(double x) { return x; }
template <typename S, int N>
double Value(const ceres::Jet<S, N>& x) {
  return x.a;
}

class StateCost {
 public:
  static constexpr int kMost = 24;  // surfaces, gaps
  static constexpr int kTerms = 4;

  StateCost(const Problem& problem, int state) : problem_(problem), state_(problem.states[state]) {}

  template <typename T>
  bool operator()(const T* shared, const T* own, T* residuals) const {
    Numbers<T> at;
    Place(shared, own, &at);
    const double root = std::sqrt(state_.weight);
    int row = 0;
    if (state_.wavefront_within > 0) {
      const size_t rays = problem_.heights.size();
      for (const Line& line : state_.lines) {
        T* paths = residuals + row;
        for (size_t ray = 0; ray < rays; ++ray) {
          if (!Path(at, line, problem_.heights[ray], &paths[ray])) return false;
        }
        T mean(0.0);
        for (size_t ray = 0; ray < rays; ++ray) mean += problem_.powers[ray] * paths[ray];
        const double scale = root / state_.wavefront_within * 1e6 / line.wavelength_nm;
        for (size_t ray = 0; ray < rays; ++ray) {
          paths[ray] = (scale * std::sqrt(problem_.powers[ray])) * (paths[ray] - mean);
        }
        row += static_cast<int>(rays);
      }
    }
    return Paraxial(at, root, residuals + row);
  }

 private:
  template <typename T>
  struct Numbers {
    T curvature[kMost], gap[kMost], term[kMost][kTerms];
  };

  template <typename T>
  void Place(const T* shared, const T* own, Numbers<T>* at) const {
    for (size_t i = 0; i < problem_.surfaces.size(); ++i) {
      const Surface& surface = problem_.surfaces[i];
      at->curvature[i] = T(surface.curvature);
      for (size_t j = 0; j < surface.terms.size(); ++j) at->term[i][j] = T(surface.terms[j].second);
    }
    for (size_t i = 0; i < problem_.gaps.size(); ++i) at->gap[i] = T(problem_.gaps[i].length);
    for (size_t j = 0; j < problem_.shared.size(); ++j) {
      const Shared& variable = problem_.shared[j];
      if (variable.kind == Shared::kCurvature) at->curvature[variable.place] = shared[j];
      if (variable.kind == Shared::kAsphere) at->term[variable.place][variable.term] = shared[j];
      if (variable.kind == Shared::kGap) at->gap[variable.place] = shared[j];
    }
    int last = -1;
    for (size_t i = 0; i < problem_.gaps.size(); ++i) {
      const int spacing = problem_.gaps[i].spacing;
      if (spacing < 0) continue;
      last = static_cast<int>(i);
      if (spacing < problem_.Spacings()) at->gap[i] = own[spacing];
    }
    if (problem_.closed) {
      T rest(problem_.track_mm);
      for (size_t i = 0; i < problem_.gaps.size(); ++i) {
        if (static_cast<int>(i) != last) rest -= at->gap[i];
      }
      at->gap[last] = rest;
    }
  }

  // Optical path to the plane through the last vertex less that of the axial ray.
  template <typename T>
  bool Path(const Numbers<T>& at, const Line& line, double height, T* out) const {
    using std::sqrt;
    T y(height), z(0.0), up(0.0), along(1.0), excess(0.0);
    for (size_t i = 0; i < problem_.surfaces.size(); ++i) {
      if (i > 0) z -= at.gap[i - 1];
      T path, across, axial;
      if (!Meet(at, i, y, z, up, along, &path, &across, &axial)) return false;
      y += path * up;
      z += path * along;
      if (problem_.surfaces[i].conic == 0.0 && !Aspheric(at, i)) {
        across = -at.curvature[i] * y;
        axial = 1.0 - at.curvature[i] * z;
      }
      excess += line.indices[i] * (i > 0 ? path - at.gap[i - 1] : path);
      const double mu = line.indices[i] / line.indices[i + 1];
      const T cosine = across * up + axial * along;
      const T square = 1.0 - mu * mu * (1.0 - cosine * cosine);
      if (!(Value(square) > 0.0) || !(Value(cosine) > 0.0)) return false;
      const T gamma = sqrt(square) - mu * cosine;
      up = mu * up + gamma * across;
      along = mu * along + gamma * axial;
    }
    *out = excess - line.indices.back() * z / along;
    return true;
  }

  template <typename T>
  bool Aspheric(const Numbers<T>& at, size_t i) const {
    for (size_t j = 0; j < problem_.surfaces[i].terms.size(); ++j) {
      if (!IsZero(at.term[i][j])) return true;
    }
    return false;
  }
  static bool IsZero(double x) { return x == 0.0; }
  // A coefficient that is zero but varies still needs its derivative.
  template <typename S, int N>
  static bool IsZero(const ceres::Jet<S, N>& x) {
    return x.a == 0.0 && x.v.isZero(0.0);
  }

  // Path along the ray to surface i; for aspheres the unit normal too.
  template <typename T>
  bool Meet(const Numbers<T>& at, size_t i, const T& y, const T& z, const T& up, const T& along,
            T* path, T* across, T* axial) const {
    using std::sqrt;
    const double k = 1.0 + problem_.surfaces[i].conic;
    const T& c = at.curvature[i];
    const bool sphere = k == 1.0;
    const T a = sphere ? c : T(c * (up * up + k * along * along));
    const T b = along - c * (y * up + k * (z * along));
    const T f = c * (y * y + k * (z * z)) - 2.0 * z;
    const T square = b * b - a * f;
    if (!(Value(square) > 0.0)) return false;
    *path = f / (b + sqrt(square));
    if (sphere && !Aspheric(at, i)) return true;
    // Newton's method on plain numbers, then one step that carries the derivatives.
    Numbers<double> plain;
    plain.curvature[i] = Value(c);
    for (size_t j = 0; j < problem_.surfaces[i].terms.size(); ++j) {
      plain.term[i][j] = Value(at.term[i][j]);
    }
    double s = Value(*path);
    for (int step = 0; step < 30; ++step) {
      double sag, slope;
      Profile(plain, i, Value(y) + s * Value(up), &sag, &slope);
      const double off = Value(z) + s * Value(along) - sag;
      s += off / (slope * Value(up) - Value(along));
      if (std::abs(off) < 1e-9) break;
    }
    if (!std::isfinite(s)) return false;
    *path = T(s);
    T sag, slope;
    Profile(at, i, T(y + s * up), &sag, &slope);
    *path += (z + s * along - sag) / (slope * up - along);
    Profile(at, i, T(y + *path * up), &sag, &slope);
    *axial = 1.0 / sqrt(1.0 + slope * slope);
    *across = -slope * *axial;
    return true;
  }

  template <typename T>
  void Profile(const Numbers<T>& at, size_t i, const T& y, T* sag, T* slope) const {
    using std::sqrt;
    const double k = 1.0 + problem_.surfaces[i].conic;
    const T& c = at.curvature[i];
    const T square = y * y;
    const T root = sqrt(1.0 - k * (c * c) * square);
    *sag = c * square / (1.0 + root);
    *slope = c * y / root;
    T power = square * y;  // r^3; the terms are r^4, r^6, … in order
    int reached = 4;
    for (size_t j = 0; j < problem_.surfaces[i].terms.size(); ++j) {
      const int wanted = problem_.surfaces[i].terms[j].first;
      for (; reached < wanted; reached += 2) power = power * square;
      *sag += at.term[i][j] * (power * y);
      *slope += static_cast<double>(wanted) * (at.term[i][j] * power);
    }
  }

  template <typename T>
  bool Paraxial(const Numbers<T>& at, double root, T* residuals) const {
    const Line& line = state_.lines[0];
    T y(1.0), angle(0.0);
    for (size_t i = 0; i < problem_.surfaces.size(); ++i) {
      if (i > 0) y += at.gap[i - 1] * angle;
      const double n = line.indices[i], behind = line.indices[i + 1];
      angle = (n * angle - (behind - n) * (at.curvature[i] * y)) / behind;
    }
    int row = 0;
    if (state_.ratio_within > 0) {
      residuals[row++] = (root * 100.0 / state_.ratio_within) * (y / state_.ratio - 1.0);
    }
    if (state_.slope_within > 0) {
      residuals[row++] = (root * 1e6 * problem_.radius_mm / state_.slope_within) * angle;
    }
    return true;
  }

  const Problem& problem_;
  const State& state_;
};

#endif
