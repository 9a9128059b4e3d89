//! `lierne manners`: shell completions and man pages, for whoever packages the program.

use super::common::write_file;
use super::{Common, Failure, Verdict};
use clap::Command;
use clap_complete::{Shell, generate};
use std::path::{Path, PathBuf};

/// Arguments of `lierne manners`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// Folder to write to: `completions/` and `man/` are made in it
    #[arg(long, value_name = "DIR", default_value = "target/manners")]
    out: PathBuf,
}

/// Runs the command; `program` is the whole program's description.
pub fn run(args: &Args, mut program: Command, common: &Common) -> Result<Verdict, Failure> {
    program.build();
    let completions = args.out.join("completions");
    let man = args.out.join("man");
    for folder in [&completions, &man] {
        std::fs::create_dir_all(folder)
            .map_err(|e| Failure::new(format!("cannot make {}: {e}", folder.display())))?;
    }
    let mut files = 0;
    for (shell, name) in [
        (Shell::Bash, "lierne.bash"),
        (Shell::Zsh, "_lierne"),
        (Shell::Fish, "lierne.fish"),
        (Shell::PowerShell, "lierne.ps1"),
        (Shell::Elvish, "lierne.elv"),
    ] {
        let mut bytes = Vec::new();
        generate(shell, &mut program, "lierne", &mut bytes);
        write_file(&completions.join(name), &bytes)?;
        files += 1;
    }
    files += pages(&program, "lierne", &man)?;
    if common.json {
        common.say_json(&serde_json::json!({ "out": args.out, "files": files }))?;
    } else {
        common.say(format!("{files} files are in {}", args.out.display()));
    }
    Ok(Verdict::Yes)
}

/// One page a command, `lierne-block-make.1` and so on.
fn pages(command: &Command, name: &str, folder: &Path) -> Result<usize, Failure> {
    let mut bytes = Vec::new();
    clap_mangen::Man::new(command.clone().name(name.to_owned())).render(&mut bytes)?;
    write_file(&folder.join(format!("{name}.1")), &bytes)?;
    let mut files = 1;
    for sub in command.get_subcommands().filter(|c| !c.is_hide_set() && c.get_name() != "help") {
        files += pages(sub, &format!("{name}-{}", sub.get_name()), folder)?;
    }
    Ok(files)
}
