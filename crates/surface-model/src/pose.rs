//! Where a surface stands and how it is turned: a rigid motion of the place it was drawn at.
//!
//! A turn is a vector along its axis whose length is its angle, so that turns about x and y keep
//! their meaning when both happen: R = exp(\[v\]×), by the formula of Rodrigues (R. M. Murray, Z. Li,
//! S. S. Sastry, *A Mathematical Introduction to Robotic Manipulation*, CRC Press 1994, eq. 2.14).

/// A point or direction, x, y, z.
pub(crate) type Vector = [f64; 3];

/// A vertex and the axes of the surface there, in the coordinates of the train: z along its axis,
/// from the first vertex as it was drawn.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pose {
    /// The vertex, mm.
    pub(crate) vertex_mm: Vector,
    /// The surface's own x, y and z axis, as rows.
    pub(crate) axes: [Vector; 3],
}

impl Pose {
    /// On the axis, upright.
    #[must_use]
    pub fn on_axis(z_mm: f64) -> Self {
        let axes = [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]];
        Self { vertex_mm: [0.0, 0.0, z_mm], axes }
    }

    /// Moved across the axis, mm.
    #[must_use]
    pub fn decentred(mut self, [x, y]: [f64; 2]) -> Self {
        self.vertex_mm[0] += x;
        self.vertex_mm[1] += y;
        self
    }

    /// Turned about x and y (rad, right-handed) around a point of the axis, `pivot_mm` from the
    /// first vertex as it was drawn.
    #[must_use]
    pub fn turned(mut self, [x, y]: [f64; 2], pivot_mm: f64) -> Self {
        if x == 0.0 && y == 0.0 {
            return self;
        }
        let turn = rotation(x, y);
        let [px, py, pz] = self.vertex_mm;
        let [rx, ry, rz] = times(&turn, [px, py, pz - pivot_mm]);
        self.vertex_mm = [rx, ry, rz + pivot_mm];
        self.axes = self.axes.map(|axis| times(&turn, axis));
        self
    }

    /// Turned about x and y (rad, right-handed) around its own vertex.
    #[must_use]
    pub fn turned_at_vertex(mut self, [x, y]: [f64; 2]) -> Self {
        let turn = rotation(x, y);
        self.axes = self.axes.map(|axis| times(&turn, axis));
        self
    }

    /// The motion from the coordinates of `self` to those of `to`: p′ = turn·p + shift.
    pub(crate) fn change_to(&self, to: &Self) -> ([Vector; 3], Vector) {
        let turn = to.axes.map(|row| self.axes.map(|column| dot(row, column)));
        let between = std::array::from_fn(|i| self.vertex_mm[i] - to.vertex_mm[i]);
        (turn, to.axes.map(|row| dot(row, between)))
    }
}

fn dot(a: Vector, b: Vector) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

fn times(matrix: &[Vector; 3], vector: Vector) -> Vector {
    matrix.map(|row| dot(row, vector))
}

/// The rotation by the vector (x, y, 0).
fn rotation(x: f64, y: f64) -> [Vector; 3] {
    let angle = x.hypot(y);
    if angle == 0.0 {
        return Pose::on_axis(0.0).axes;
    }
    let (ux, uy) = (x / angle, y / angle);
    let sin = angle.sin();
    // 1 − cos without loss of digits.
    let versed = 2.0 * (0.5 * angle).sin().powi(2);
    [
        [1.0 - versed * uy * uy, versed * ux * uy, sin * uy],
        [versed * ux * uy, 1.0 - versed * ux * ux, -sin * ux],
        [-sin * uy, sin * ux, 1.0 - versed],
    ]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_turn_about_x_takes_z_to_minus_y() {
        let pose = Pose::on_axis(3.0).turned([0.1, 0.0], 1.0);
        let close = |a: Vector, b: Vector| (0..3).all(|i| (a[i] - b[i]).abs() < 1e-15);
        let (sin, cos) = 0.1_f64.sin_cos();
        assert!(close(pose.axes[2], [0.0, -sin, cos]), "{pose:?}");
        assert!(close(pose.vertex_mm, [0.0, -2.0 * sin, 1.0 + 2.0 * cos]), "{pose:?}");
    }

    #[test]
    fn turns_are_rigid_and_come_back() {
        let pose = Pose::on_axis(20.0).decentred([0.3, -0.2]).turned([0.02, -0.05], 11.0);
        for (i, a) in pose.axes.iter().enumerate() {
            for (j, b) in pose.axes.iter().enumerate() {
                let wanted = if i == j { 1.0 } else { 0.0 };
                assert!((dot(*a, *b) - wanted).abs() < 1e-15);
            }
        }
        let back = pose.turned([-0.02, 0.05], 11.0);
        let start = Pose::on_axis(20.0).decentred([0.3, -0.2]);
        for i in 0..3 {
            assert!((back.vertex_mm[i] - start.vertex_mm[i]).abs() < 1e-14);
        }
        assert_eq!(start.turned([0.0, 0.0], 4.0), start);
    }

    #[test]
    fn a_change_of_coordinates_keeps_points_where_they_are() {
        let (a, b) = (
            Pose::on_axis(5.0).decentred([0.1, 0.0]).turned_at_vertex([0.2, 0.0]),
            Pose::on_axis(9.0).turned([0.0, 0.3], 2.0),
        );
        let (turn, shift) = a.change_to(&b);
        // The vertex of b in its own coordinates is the origin.
        let in_a: Vector = {
            let between = std::array::from_fn(|i| b.vertex_mm[i] - a.vertex_mm[i]);
            a.axes.map(|row| dot(row, between))
        };
        let seen = times(&turn, in_a);
        assert!((0..3).all(|i| (seen[i] + shift[i]).abs() < 1e-14));
    }
}
