//! The program with its writing broken on purpose, for the tests that must notice.

fn main() -> std::process::ExitCode {
    driver::careless::write_carelessly_from_now_on();
    drawtube::main()
}
