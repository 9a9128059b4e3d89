//! The program `lierne`; all of it is in [`lierne::cli`].

fn main() -> std::process::ExitCode {
    lierne::cli::main()
}
