"""A beam expander's merit function for NumPy, from the definitions and from nothing else.

Reads a design file of format drawtube/1 and computes the residuals whose squares add up to

    sum over states of weight x [ sum over wavelengths (RMS / within)^2
                                  + (ratio error in per cent / within)^2
                                  + (exit slope in urad / within)^2 ]

with the RMS at Gauss-Legendre nodes in r^2. It shares no code and no method of working with the
Rust crates beyond those definitions and the catalogue's coefficients, so that agreement means
something. Every array has the axes (batch, state and wavelength, ray): a batch of points, one a
variable with an imaginary step, gives the whole Jacobian in one vectorised evaluation
(W. Squire and G. Trapp, SIAM Review 40, 110 (1998)).

Surfaces are met in closed form where there is one. With `newton=True` every surface, sphere or
not, is met by Newton's method on its sag instead, and with `dtype=numpy.longdouble` in extended
precision: the reference against which the double-precision program is checked.
"""

import json
import pathlib

import numpy as np

CATALOGUE = (
    pathlib.Path(__file__).resolve().parents[2] / "crates/surface-model/data/glasses.json"
)
RAYS = 6
STEEPEST = 0.98


class Glasses:
    """Refractive indices relative to air by glass name."""

    def __init__(self, own):
        with open(CATALOGUE, encoding="utf-8") as file:
            entries = json.load(file)["glasses"]
        self.catalogue = {}
        for entry in entries:
            self.catalogue.setdefault(entry["name"], entry)
            self.catalogue[f"{entry['maker']}:{entry['name']}"] = entry
        self.own = own

    def index(self, name, wavelength_nm, dtype):
        if name in self.own:
            glass = self.own[name]
            if "index" in glass:
                return dtype(glass["index"])
            return self.index(glass["from"], wavelength_nm, dtype) + dtype(glass["index_shift"])
        entry = self.catalogue[name]
        square = (dtype(wavelength_nm) / 1000) ** 2
        if entry["law"] == "sellmeier":
            terms = [dtype(b) * square / (square - dtype(c)) for b, c in entry["terms"]]
            return np.sqrt(1 + dtype(entry["offset"]) + sum(terms))
        terms = [dtype(c) * square ** (dtype(p) / 2) for c, p in entry["terms"]]
        return np.sqrt(dtype(entry["offset"]) + sum(terms))


class Expander:
    """Residuals of a design file over its free numbers."""

    def __init__(self, document, dtype=np.float64, newton=False, rays=RAYS):
        self.document = document
        self.dtype = dtype
        self.newton = newton
        self._read_surfaces()
        self._read_states()
        self._choose_variables()
        self._place_rays(rays)

    def _read_surfaces(self):
        """Surfaces from left to right; what lies behind each: glass or air, and which gap."""
        self.curvature, self.conic, self.asphere, self.semi = [], [], [], []
        self.media = []
        self.gaps = []
        for g, group in enumerate(self.document["groups"]):
            for e, element in enumerate(group["elements"]):
                for s, radius in enumerate(element["radii_mm"]):
                    shape = (element.get("shapes") or [None] * 9)[s] or {}
                    self.curvature.append(0.0 if radius == "flat" else 1 / self.dtype(radius))
                    self.conic.append(self.dtype(shape.get("conic", 0.0)))
                    coefficients = shape.get("asphere", {})
                    self.asphere.append({int(p): self.dtype(a) for p, a in coefficients.items()})
                    self.semi.append(element["diameter_mm"] / 2)
                    if s < len(element["glasses"]):
                        self.media.append(element["glasses"][s])
                        self.gaps.append(("thickness", g, e, s))
                self.media.append(None)
                if e + 1 < len(group["elements"]):
                    self.gaps.append(("air", g, e))
            if g + 1 < len(self.document["groups"]):
                self.gaps.append(("spacing", g))

    def _read_states(self):
        document, dtype = self.document, self.dtype
        glasses = Glasses(document.get("glasses", {}))
        self.lines = []
        self.goals = []
        for k, state in enumerate(document["states"]):
            goals = {**document["goals"], **state.get("goals", {})}
            self.goals.append({name: dtype(goal["within"]) for name, goal in goals.items()})
            for nm in state.get("wavelengths_nm", document["beam"]["wavelengths_nm"]):
                indices = [dtype(1)]
                for medium in self.media:
                    one = medium is None
                    indices.append(dtype(1) if one else glasses.index(medium, nm, dtype))
                self.lines.append((k, dtype(nm), indices))
        self.index = np.array([indices for _, _, indices in self.lines]).T[:, None, :, None]
        self.state_of_line = np.array([k for k, _, _ in self.lines])
        self.first_line = [int(np.argmax(self.state_of_line == k)) for k in range(len(self.goals))]
        self.spacing = np.array([s["spacings_mm"] for s in document["states"]], dtype=dtype)
        self.weight = np.array([s.get("weight", 1.0) for s in document["states"]], dtype=dtype)
        self.ratio_wanted = np.array([s["ratio"] for s in document["states"]], dtype=dtype)
        fixed = document["housing"]["fixed"]
        names = [group["name"] for group in document["groups"]]
        self.both_ends = names[0] in fixed and names[-1] in fixed

    def _choose_variables(self):
        """Free numbers: what is shared first, in the order of the file, then spacings by state."""
        self.shared = []
        surface = 0
        for g, group in enumerate(self.document["groups"]):
            for e, element in enumerate(group["elements"]):
                here = [("groups",), (group["name"], g), ("elements",), (element.get("name"), e)]
                for s in range(len(element["radii_mm"])):
                    if self._free("radii", [*here, ("radii_mm",), (s,)]):
                        self.shared.append(("curvature", surface))
                    for power in sorted(self.asphere[surface]):
                        at = [*here, ("shapes",), (s,), ("asphere",), (power,)]
                        if self._free("aspheres", at):
                            self.shared.append(("asphere", surface, power))
                    surface += 1
                for s in range(len(element["glasses"])):
                    if self._free("thicknesses", [*here, ("thicknesses_mm",), (s,)]):
                        self.shared.append(("thickness", g, e, s))
        last = len(self.document["groups"]) - 1
        self.own = []
        for k, state in enumerate(self.document["states"]):
            for after in range(last - 1 if self.both_ends else last):
                at = [("states",), (state["name"], k), ("spacings_mm",), (after,)]
                if self._free("spacings", at):
                    self.own.append((k, after))

    def _free(self, word, steps):
        """Whether a number is free by its word and not held, by word or by address."""
        held = self.document.get("held", [])
        if word not in self.document.get("free", ["radii", "spacings"]) or word in held:
            return False
        for address in held:
            wanted = address.split("/")[1:]
            names = [[str(name) for name in step] for step in steps]
            if wanted and all(step in name for step, name in zip(wanted, names)):
                return False
        return True

    def _place_rays(self, rays):
        beam, dtype = self.document["beam"], self.dtype
        nodes, weights = legendre_rule(rays, dtype)
        reach = dtype(beam["traced_to"])
        self.radius = dtype(beam["diameter_mm"]) / 2
        self.heights = reach * self.radius * np.sqrt(nodes)
        power = weights * np.exp(-2 * nodes * reach**2)
        self.power = power / power.sum()

    # ---- variables -------------------------------------------------------------------------

    def start(self):
        shared = [self._value(place) for place in self.shared]
        own = [self.spacing[k, after] for k, after in self.own]
        return np.array(shared + own, dtype=self.dtype)

    def _value(self, place):
        if place[0] == "curvature":
            return self.curvature[place[1]]
        if place[0] == "asphere":
            return self.asphere[place[1]][place[2]]
        return self.dtype(self._element(place)["thicknesses_mm"][place[3]])

    def _element(self, place):
        return self.document["groups"][place[1]]["elements"][place[2]]

    def bounds(self):
        """Limits on single numbers: radius, steepness, centre thickness, spacing."""
        limits = self.document.get("limits", {})
        low, high = [], []
        for place in self.shared:
            if place[0] == "curvature":
                semi = self.semi[place[1]]
                most = STEEPEST / semi / np.sqrt(max(1 + float(self.conic[place[1]]), 1.0))
                least_radius = limits.get("radius_mm", {}).get("min", 0)
                most = min(most, 1 / least_radius if least_radius else np.inf)
                most = min(most, limits.get("steepness", {}).get("max", np.inf) / semi)
                ends = -most, most
            elif place[0] == "thickness":
                limit = limits.get("centre_thickness_mm", {})
                ends = limit.get("min", 0.0), limit.get("max", np.inf)
            else:
                ends = -np.inf, np.inf
            low.append(ends[0])
            high.append(ends[1])
        limit = limits.get("spacing_mm", {})
        low += [limit.get("min", 0.0)] * len(self.own)
        high += [limit.get("max", np.inf)] * len(self.own)
        return np.array(low), np.array(high)

    def _place(self, x):
        """Curvatures, asphere coefficients and gaps at a batch of points, with all their axes."""
        curvature = list(self.curvature)
        asphere = [dict(terms) for terms in self.asphere]
        thickness = {}
        for column, place in enumerate(self.shared):
            value = x[:, column, None, None]
            if place[0] == "curvature":
                curvature[place[1]] = value
            elif place[0] == "asphere":
                asphere[place[1]][place[2]] = value
            else:
                thickness[place] = value
        spacing = np.repeat(self.spacing[None].astype(x.dtype), len(x), axis=0)
        for column, (k, after) in enumerate(self.own, start=len(self.shared)):
            spacing[:, k, after] = x[:, column]
        gaps = []
        for gap in self.gaps:
            if gap[0] == "thickness":
                written = self.dtype(self._element(gap)["thicknesses_mm"][gap[3]])
                gaps.append(thickness.get(gap, written))
            elif gap[0] == "air":
                gaps.append(self.dtype(self.document["groups"][gap[1]]["airs_mm"][gap[2]]))
            else:
                gaps.append(spacing[:, self.state_of_line, gap[1], None])
        if self.both_ends:
            last = max(i for i, gap in enumerate(self.gaps) if gap[0] == "spacing")
            rest = sum(gap for i, gap in enumerate(gaps) if i != last)
            gaps[last] = self.dtype(self.document["housing"]["track_mm"]) - rest
        return curvature, asphere, gaps

    # ---- optics ----------------------------------------------------------------------------

    def paths(self, curvature, asphere, gaps, batch):
        """Optical path to the plane through the last vertex less that of the axial ray, mm."""
        shape = (batch, len(self.lines), len(self.heights))
        kind = np.result_type(self.dtype, *[np.asarray(c).dtype for c in curvature + gaps])
        y = np.broadcast_to(self.heights, shape).astype(kind)
        z, up, along = np.zeros_like(y), np.zeros_like(y), np.ones_like(y)
        excess = np.zeros_like(y)
        for i, c in enumerate(curvature):
            n, behind = self.index[i], self.index[i + 1]
            gap = gaps[i - 1] if i else 0
            z = z - gap
            y, z, way, slope = self._meet(i, c, asphere[i], y, z, up, along)
            excess = excess + n * (way - gap)
            # Normal towards +z of z = sag(y); Snell's law as n'd' = n d + (n'cos I' - n cos I) N.
            axial = 1 / np.sqrt(1 + slope * slope)
            across = -slope * axial
            cosine = n * (across * up + axial * along)
            bent = np.sqrt(behind * behind - n * n + cosine * cosine) - cosine
            up = (n * up + bent * across) / behind
            along = (n * along + bent * axial) / behind
        return excess - self.index[-1] * z / along

    def _meet(self, i, c, terms, y, z, up, along):
        """Point on surface i, path to it, and the surface's slope dz/dy there."""
        k = 1 + self.conic[i]
        aspheric = any(np.any(a != 0) for a in terms.values())
        if self.newton:
            way = -z / along
        else:
            a = c * (up * up + k * along * along)
            b = along - c * (y * up + k * z * along)
            f = c * (y * y + k * z * z) - 2 * z
            way = f / (b + np.sqrt(b * b - a * f))
        if self.newton or aspheric:
            for _ in range(50):
                height = y + way * up
                sag, slope = self._profile(c, k, terms, height)
                step = (z + way * along - sag) / (slope * up - along)
                way = way + step
                # One more step than double precision needs, so that imaginary parts settle too.
                if np.all(np.abs(step) < 1e-13) or np.any(np.isnan(step)):
                    break
        y, z = y + way * up, z + way * along
        if aspheric:
            slope = self._profile(c, k, terms, y)[1]
        else:
            slope = c * y / np.sqrt(1 - k * c * c * y * y)
        return y, z, way, slope

    @staticmethod
    def _profile(c, k, terms, y):
        root = np.sqrt(1 - k * c * c * y * y)
        sag, slope = c * y * y / (1 + root), c * y / root
        for power, a in terms.items():
            sag = sag + a * y**power
            slope = slope + power * a * y ** (power - 1)
        return sag, slope

    def paraxial(self, curvature, gaps):
        """Height at the last surface and slope behind it of a ray that enters at height 1."""
        y, angle = 1, 0
        for i, c in enumerate(curvature):
            if i:
                y = y + gaps[i - 1] * angle
            n, behind = self.index[i], self.index[i + 1]
            angle = (n * angle - (behind - n) * c * y) / behind
        shape = np.broadcast_shapes(np.shape(y), np.shape(angle), (1, len(self.lines), 1))
        return np.broadcast_to(y, shape)[..., 0], np.broadcast_to(angle, shape)[..., 0]

    def batch(self, x):
        """Residuals at a batch of points, (points, residuals)."""
        with np.errstate(all="ignore"):
            curvature, asphere, gaps = self._place(x)
            paths = self.paths(curvature, asphere, gaps, len(x))
            y, angle = self.paraxial(curvature, gaps)
        rows = []
        for k, goals in enumerate(self.goals):
            root = np.sqrt(self.weight[k])
            if "wavefront_rms_waves" in goals:
                for line in np.flatnonzero(self.state_of_line == k):
                    waves = paths[:, line] / (self.lines[line][1] * self.dtype("1e-6"))
                    mean = (waves * self.power).sum(axis=1, keepdims=True)
                    factor = root / goals["wavefront_rms_waves"]
                    rows.append(factor * np.sqrt(self.power) * (waves - mean))
            line = self.first_line[k]
            if "ratio_percent" in goals:
                error = 100 * (y[:, line, None] / self.ratio_wanted[k] - 1)
                rows.append(root * error / goals["ratio_percent"])
            if "exit_slope_urad" in goals:
                slope = self.radius * angle[:, line, None] * 1_000_000
                rows.append(root * slope / goals["exit_slope_urad"])
        return np.concatenate(np.broadcast_arrays(*rows) if len(x) == 0 else
                              [np.broadcast_to(r, (len(x), r.shape[1])) for r in rows], axis=1)

    def residuals(self, x):
        return self.batch(np.asarray(x, dtype=self.dtype)[None])[0]

    def jacobian(self, x):
        """Exact to rounding: an imaginary step in every variable, all of them at once."""
        step = 1e-30
        points = np.asarray(x)[None] + 1j * step * np.eye(len(x))
        return self.batch(points).imag.T / step

    def design_at(self, x):
        """The design file with these values of its free numbers."""
        document = json.loads(json.dumps(self.document))
        surfaces = [
            (element, s)
            for group in document["groups"]
            for element in group["elements"]
            for s in range(len(element["radii_mm"]))
        ]
        for value, place in zip(x, self.shared):
            value = float(value)
            if place[0] == "curvature":
                element, s = surfaces[place[1]]
                element["radii_mm"][s] = 1 / value if value else "flat"
            elif place[0] == "asphere":
                element, s = surfaces[place[1]]
                element["shapes"][s]["asphere"][str(place[2])] = value
            else:
                element = document["groups"][place[1]]["elements"][place[2]]
                element["thicknesses_mm"][place[3]] = value
        for value, (k, after) in zip(x[len(self.shared):], self.own):
            document["states"][k]["spacings_mm"][after] = float(value)
        if self.both_ends:
            self._close_housing(document)
        return document

    @staticmethod
    def _close_housing(document):
        glass = sum(
            sum(sum(e["thicknesses_mm"]) for e in g["elements"]) + sum(g.get("airs_mm", []))
            for g in document["groups"]
        )
        for state in document["states"]:
            rest = glass + sum(state["spacings_mm"][:-1])
            state["spacings_mm"][-1] = document["housing"]["track_mm"] - rest


def legendre_rule(count, dtype):
    """Gauss-Legendre nodes and weights on [0, 1], polished to the precision of `dtype`."""
    nodes, _ = np.polynomial.legendre.leggauss(count)
    nodes = nodes.astype(dtype)
    for _ in range(3):
        before, value = np.ones_like(nodes), nodes
        for k in range(2, count + 1):
            before, value = value, ((2 * k - 1) * nodes * value - (k - 1) * before) / k
        slope = count * (nodes * value - before) / (nodes * nodes - 1)
        nodes = nodes - value / slope
    weights = 1 / ((1 - nodes**2) * slope**2)
    return (1 + nodes) / 2, weights


def load(path, **options):
    with open(path, encoding="utf-8") as file:
        return Expander(json.load(file), **options)
