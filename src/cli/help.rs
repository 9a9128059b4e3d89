//! `lierne help`: the help of a command, or a page on a topic.

use super::{Common, Failure, Verdict};
use crate::network::nearest;
use clap::Command;

/// Pages besides the commands.
const TOPICS: [(&str, &str); 2] = [
    ("conventions", include_str!("topics/conventions.txt")),
    ("study-file", include_str!("topics/study-file.txt")),
];

/// Arguments of `lierne help`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// A command (`block make`), or a topic: conventions, study-file
    #[arg(value_name = "WORDS")]
    words: Vec<String>,
}

/// Runs the command; `program` is the whole program's description.
pub fn run(args: &Args, mut program: Command, common: &Common) -> Result<Verdict, Failure> {
    program.build();
    if let [word] = args.words.as_slice()
        && let Some((_, page)) = TOPICS.iter().find(|t| t.0 == word)
    {
        common.say(page.trim_end());
        return Ok(Verdict::Yes);
    }
    let mut here = program;
    for word in &args.words {
        let names: Vec<&str> = here
            .get_subcommands()
            .filter(|c| !c.is_hide_set())
            .map(Command::get_name)
            .chain(TOPICS.iter().map(|t| t.0))
            .collect();
        let Some(next) = here.find_subcommand(word) else {
            return Err(Failure::new(format!(
                "there is no help on {word:?}; the nearest is {:?}, and `lierne help` lists all",
                nearest(word, &names)
            )));
        };
        here = next.clone();
    }
    let mut text = here.render_long_help().to_string();
    if args.words.is_empty() {
        text.push_str("\nTopics (lierne help TOPIC): conventions, study-file\n");
    }
    common.say(text.trim_end());
    Ok(Verdict::Yes)
}
