//! The program. Everything is in the library; see its map.

fn main() -> std::process::ExitCode {
    washbell::cli::main()
}
