use super::test_problems::expander;
use super::*;

#[test]
fn measure() {
    for acceleration in [Some(0.75), None] {
        let (mut its, mut res, mut jac, mut solved) = (0, 0, 0, 0);
        let mut finals = vec![];
        for seed in 0..24 {
            let upset = [0.02, 0.1, 0.2][seed as usize % 3];
            let (mut problem, start) = expander(&[2.0, 3.0, 4.0, 6.0], upset, seed);
            let settings = Settings::default().with_acceleration(acceleration).unwrap();
            let Ok(o) = run(&mut problem, &start, &settings, &mut |p: &Progress<'_>| {
                if std::env::var("VV").is_ok() {
                    println!(
                        "   {} {:.12e} {:.2e} {:.2e} {}",
                        p.iteration,
                        p.sum_of_squares,
                        p.damping.unwrap(),
                        p.step,
                        p.accepted
                    );
                }
                std::ops::ControlFlow::Continue(())
            }) else {
                println!("fault");
                continue;
            };
            if std::env::var("V").is_ok() {
                println!(
                    "{seed} {} {} {} {:.9e} {:?} viol {:.2e}",
                    o.iterations,
                    o.evaluations,
                    o.linearisations,
                    o.sum_of_squares,
                    o.stopped,
                    o.violation
                );
            }
            its += o.iterations;
            res += o.evaluations;
            jac += o.linearisations;
            finals.push(o.sum_of_squares);
            solved += usize::from(o.stopped.was_successful());
        }
        finals.sort_by(f64::total_cmp);
        println!(
            "EXP {acceleration:?} steps {its} res {res} jac {jac} ok {solved} median {:.6e} mean-log {:.3}",
            finals[finals.len() / 2],
            finals.iter().map(|f| f.log10()).sum::<f64>() / finals.len() as f64
        );
    }
}
