//! The program `drawtube`.

fn main() -> std::process::ExitCode {
    drawtube::main()
}
