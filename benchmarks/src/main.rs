//! Kernels and whole jobs, measured beside the peers they are held against.
//!
//! ```text
//! cargo run --release -p benchmarks                    everything; writes benchmarks/README.md
//! cargo run --release -p benchmarks SECTION [NAME…]    one section, to standard output
//! cargo run --release -p benchmarks instructions check    holds two kernels to instructions.txt
//! cargo run --release -p benchmarks instructions commit   writes instructions.txt anew
//! cargo run --release -p benchmarks kernel NAME CALLS  one kernel over and over, for a profiler
//! cargo run --release -p benchmarks peer-input DESIGN  a design as the Ceres program reads it
//! ```
//!
//! Peers are measured in turn with ours in the same run, so that ratios mean something on a busy
//! machine.

mod bare_loop;
mod derivatives;
mod design;
mod instructions;
mod jobs;
mod memory;
mod minpack;
mod more_states;
mod page;
mod peer_input;
mod peers;
mod profile;
mod retune;
mod search;
mod spread;
mod steps;
mod sweep;
mod threads;
mod tolerance;
mod zoom_states;

/// Anything that stops a measurement.
pub(crate) type Failure = Box<dyn std::error::Error>;

fn main() -> Result<(), Failure> {
    let words: Vec<String> = std::env::args().skip(1).collect();
    let words: Vec<&str> = words.iter().map(String::as_str).collect();
    let section = match words.as_slice() {
        [] => return page::write(),
        ["kernel", name, calls] => return instructions::repeat(name, calls.parse()?),
        ["peer-input", name] => {
            print!("{}", peer_input::text(&design::load(name)?)?);
            return Ok(());
        }
        ["instructions", "check"] => return instructions::check(),
        ["instructions", "commit"] => return instructions::commit(),
        ["jobs", names @ ..] => jobs::section(names)?,
        ["steps"] => steps::section()?,
        ["more-states"] => more_states::section()?,
        ["derivatives"] => derivatives::section()?,
        ["trace"] => bare_loop::section()?,
        ["states"] => zoom_states::section()?,
        ["threads"] => threads::section()?,
        ["tolerance"] => tolerance::section()?,
        ["search", names @ ..] => search::section(names)?,
        ["sweep"] => sweep::section()?,
        ["retune"] => retune::section()?,
        ["instructions"] => instructions::section()?,
        ["profile"] => profile::section()?,
        _ => {
            return Err(
                "sections: jobs [DESIGN…], steps, more-states, derivatives, trace, states, \
                        threads, search [DESIGN…], sweep, retune, tolerance, instructions, \
                        profile; or kernel NAME CALLS, peer-input DESIGN"
                    .into(),
            );
        }
    };
    print!("{}", section.text);
    Ok(())
}
