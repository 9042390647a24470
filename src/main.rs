//! Parses the command line, runs one command, maps the result to an exit code.

fn main() -> std::process::ExitCode {
    ebbmark::cli::run(std::env::args_os())
}
