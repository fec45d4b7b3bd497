//! The `isophone` binary.

fn main() -> std::process::ExitCode {
    isophone::cli::main()
}
