//! `man`: the manual page of the program or of one command, from the definitions of the command line.

use crate::arguments::{Arguments, ManArguments};
use crate::input::nearest;
use crate::outcome::{Outcome, Status};
use clap::{Command, CommandFactory};

/// Runs the command.
pub fn run(arguments: &ManArguments) -> Outcome {
    let mut program = Arguments::command();
    program.build();
    let page = match &arguments.command {
        None => program,
        Some(name) => match program.find_subcommand(name) {
            Some(command) => command.clone(),
            None => return unknown(name, &program),
        },
    };
    let mut roff = Vec::new();
    let rendered = clap_mangen::Man::new(page).render(&mut roff);
    match rendered.map(|()| String::from_utf8(roff)) {
        Ok(Ok(text)) => Outcome::done(text),
        _ => Outcome::failed(Status::Unanswered, "error: the page cannot be made\n"),
    }
}

fn unknown(name: &str, program: &Command) -> Outcome {
    let names: Vec<&str> = program.get_subcommands().map(Command::get_name).collect();
    let hint = match nearest(name, names.iter().copied()) {
        Some(near) => format!("did you mean `{near}`?"),
        None => format!("the commands are {}", names.join(", ")),
    };
    Outcome::failed(Status::Wrong, format!("error: there is no command `{name}`; {hint}\n"))
}
