//! Kernels and whole jobs, with the peers they are held against.
mod design; mod spread; mod minpack; mod peer_input; mod peers; mod jobs;
pub(crate) type Failure = Box<dyn std::error::Error>;
fn main() -> Result<(), Failure> {
    let args: Vec<String> = std::env::args().skip(1).collect();
    println!("{}", jobs::section(&args)?);
    Ok(())
}
