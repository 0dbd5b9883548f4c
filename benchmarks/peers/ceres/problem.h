// The text `benchmarks peer-input DESIGN` writes: one beam expander as plain numbers.
#ifndef PROBLEM_H
#define PROBLEM_H

#include <istream>
#include <string>
#include <utility>
#include <vector>

struct Surface {
  double curvature = 0.0;
  double conic = 0.0;
  std::vector<std::pair<int, double>> terms;  // power of r and coefficient
};

struct Gap {
  double length = 0.0;
  int spacing = -1;  // number of the spacing between groups it is, or -1
};

struct Line {
  double wavelength_nm = 0.0;
  std::vector<double> indices;  // one more than surfaces
};

struct State {
  double weight = 1.0;
  double ratio = 1.0;
  double wavefront_within = 0.0;  // a goal that is absent has 0 here
  double ratio_within = 0.0;
  double slope_within = 0.0;
  std::vector<Line> lines;
  std::vector<double> spacings;
  int rows(int rays) const {
    return (wavefront_within > 0 ? rays * static_cast<int>(lines.size()) : 0) +
           (ratio_within > 0) + (slope_within > 0);
  }
};

struct Shared {
  enum Kind { kCurvature, kAsphere, kGap } kind = kCurvature;
  int place = 0;
  int term = 0;  // which of the surface's terms, for kAsphere
  double low = 0.0, high = 0.0;
};

struct Own {
  int state = 0;
  int spacing = 0;
  double low = 0.0, high = 0.0;
};

struct Problem {
  double radius_mm = 0.0;
  std::vector<double> heights, powers;
  std::vector<Surface> surfaces;
  std::vector<Gap> gaps;
  std::vector<State> states;
  std::vector<Shared> shared;
  std::vector<Own> own;
  // Spacings of a state that are parameters: all but the last one when `closed`.
  int Spacings() const {
    return static_cast<int>(states[0].spacings.size()) - (closed ? 1 : 0);
  }

  bool closed = false;  // the last spacing is the track less every other gap
  double track_mm = 0.0;

  double Start(const Shared& variable) const {
    switch (variable.kind) {
      case Shared::kCurvature: return surfaces[variable.place].curvature;
      case Shared::kAsphere: return surfaces[variable.place].terms[variable.term].second;
      default: return gaps[variable.place].length;
    }
  }
};

inline Problem Read(std::istream& in) {
  Problem p;
  std::string word;
  size_t count = 0;
  in >> word >> p.radius_mm >> word >> count;
  p.heights.resize(count);
  p.powers.resize(count);
  for (double& height : p.heights) in >> height;
  for (double& power : p.powers) in >> power;
  in >> word >> count;
  p.surfaces.resize(count);
  for (Surface& surface : p.surfaces) {
    size_t terms = 0;
    in >> surface.curvature >> surface.conic >> terms;
    surface.terms.resize(terms);
    for (auto& term : surface.terms) in >> term.first >> term.second;
  }
  in >> word >> count;
  p.gaps.resize(count);
  for (Gap& gap : p.gaps) in >> gap.spacing >> gap.length;
  size_t spacings = 0;
  in >> word >> count >> spacings;
  p.states.resize(count);
  for (State& state : p.states) {
    in >> state.weight >> state.ratio >> state.wavefront_within >> state.ratio_within >>
        state.slope_within >> count;
    state.lines.resize(count);
    for (Line& line : state.lines) {
      in >> line.wavelength_nm;
      line.indices.resize(p.surfaces.size() + 1);
      for (double& index : line.indices) in >> index;
    }
    state.spacings.resize(spacings);
    for (double& spacing : state.spacings) in >> spacing;
  }
  in >> word >> count;
  p.shared.resize(count);
  for (Shared& variable : p.shared) {
    int kind = 0;
    in >> kind >> variable.place >> variable.term >> variable.low >> variable.high;
    variable.kind = static_cast<Shared::Kind>(kind);
  }
  in >> word >> count;
  p.own.resize(count);
  for (Own& variable : p.own)
    in >> variable.state >> variable.spacing >> variable.low >> variable.high;
  in >> word >> p.closed >> p.track_mm;
  return p;
}

#endif
