//! Differential evolution over points, each improved a little before it is judged.
//!
//! R. Storn and K. Price, J. Global Optim. 11, 341 (1997), rand/1/bin: for each member of a
//! population a rival is bred from three others, v = a + F (b − c), coordinate by coordinate with
//! probability CR, and takes its place if it is better. What is bred are points of the unit cube;
//! what is judged is what a short local optimisation makes of the candidate there.

use rand::RngExt;

use super::candidate::{Candidate, keep_best};
use super::source::Quarry;
use super::workbench::{Effort, Workbench};
use crate::run::Interrupted;
use crate::sampling::RandomStream;

/// Members of the population.
const MEMBERS: usize = 16;
/// Generations.
const GENERATIONS: usize = 10;
/// Storn and Price's F and CR, within the ranges they recommend.
const FACTOR: f64 = 0.6;
const CROSSING: f64 = 0.8;
/// Steps of the local optimisation before a member is judged.
const STEPS: u64 = 15;
/// Members that go on when the generations are over.
const GO_ON: usize = 2;

struct Member {
    point: Vec<f64>,
    candidate: Candidate,
}

/// The best candidates of a start, best first, improved but not finished.
pub(super) fn best(
    quarry: &mut Quarry<'_>,
    bench: &mut Workbench<'_>,
    random: &mut RandomStream,
) -> Result<Vec<Candidate>, Interrupted> {
    let mut members = Vec::with_capacity(MEMBERS);
    for i in 0..quarry.most_points() {
        if members.len() == MEMBERS {
            break;
        }
        let point = quarry.point(i, random);
        members.extend(member(quarry, bench, point)?);
    }
    // Breeding takes a member and three others.
    let generations = if members.len() < 4 { 0 } else { GENERATIONS };
    for _ in 0..generations {
        for i in 0..members.len() {
            let point = breed(&members, i, random);
            if let Some(rival) = member(quarry, bench, point)?
                && rival.candidate.is_better_than(&members[i].candidate)
            {
                members[i] = rival;
            }
        }
    }
    let mut candidates = members.into_iter().map(|member| member.candidate).collect();
    keep_best(&mut candidates, GO_ON);
    Ok(candidates)
}

fn member(
    quarry: &mut Quarry<'_>,
    bench: &mut Workbench<'_>,
    point: Vec<f64>,
) -> Result<Option<Member>, Interrupted> {
    let Some(candidate) = quarry.at(bench, &point)? else { return Ok(None) };
    let improved = bench.improve(candidate.ground, &candidate.variables, Effort::Steps(STEPS))?;
    Ok(Some(Member { point, candidate: improved.unwrap_or(candidate) }))
}

/// A rival of member `i`.
fn breed(members: &[Member], i: usize, random: &mut RandomStream) -> Vec<f64> {
    let mut others = [i; 4];
    for k in 1..others.len() {
        while others[..k].contains(&others[k]) {
            others[k] = random.random_range(0..members.len());
        }
    }
    let [_, a, b, c] = others.map(|other| &members[other].point);
    let own = &members[i].point;
    let always = random.random_range(0..own.len().max(1));
    let coordinates = own.iter().enumerate();
    coordinates
        .map(|(j, &x)| {
            let crossed = random.random::<f64>() < CROSSING || j == always;
            if crossed { reflected(a[j] + FACTOR * (b[j] - c[j])) } else { x }
        })
        .collect()
}

/// A coordinate that left the cube by one of its faces, thrown back.
fn reflected(x: f64) -> f64 {
    let inside = if x < 0.0 { -x } else { x };
    let inside = if inside >= 1.0 { 2.0 - inside } else { inside };
    inside.clamp(0.0, 1.0_f64.next_down())
}
