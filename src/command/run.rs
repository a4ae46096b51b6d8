//! From arguments to an exit code: the one place that writes to the standard streams.

use std::io::{self, Write};

use anyhow::Context as _;
use clap::Parser as _;

use super::arguments::{Arguments, Command, Decode, Export};
use super::{decode, rehearse, situation, watch};
use crate::feed::completeness::Stamp;
use crate::feed::received::received;
use crate::paper::{brief, json, points};
use crate::wire::Context;

/// All went well.
const DONE: u8 = 0;
/// It ran, and failed or found faults.
const FAILED: u8 = 1;

/// Runs the program on the process's arguments. The exit code is 0 where all went well, 1 where
/// it failed, 2 for arguments that make no sense.
pub fn run() -> u8 {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version go to standard output with code 0, complaints to standard error.
            let _ = error.print();
            return u8::try_from(error.exit_code()).unwrap_or(2);
        }
    };
    match dispatch(arguments.command) {
        Ok(code) => code,
        Err(error) if is_broken_pipe(&error) => DONE,
        Err(error) => {
            let _ = writeln!(io::stderr(), "glasskeeper: {error:#}");
            FAILED
        }
    }
}

/// The reader of our output went away: that is its right.
fn is_broken_pipe(error: &anyhow::Error) -> bool {
    error
        .chain()
        .filter_map(|cause| cause.downcast_ref::<io::Error>())
        .any(|cause| cause.kind() == io::ErrorKind::BrokenPipe)
}

fn tell(lines: &[String]) {
    for line in lines {
        let _ = writeln!(io::stderr(), "glasskeeper: {line}");
    }
}

fn dispatch(command: Command) -> anyhow::Result<u8> {
    let mut out = io::BufWriter::new(io::stdout());
    let code = match command {
        Command::Watch(arguments) => return watch::run(&arguments),
        Command::Brief(arguments) => {
            let configured = situation::configured(&arguments.configuration)?;
            tell(&configured.complaints);
            let picture =
                situation::situation(&arguments.folder, &configured, arguments.at.as_deref())?;
            if arguments.json {
                serde_json::to_writer_pretty(&mut out, &json::brief_json(&picture))?;
                writeln!(out)?;
            } else {
                write!(out, "{}", brief::brief_text(&picture))?;
            }
            DONE
        }
        Command::Export(Export::Points(arguments)) => {
            let places = points::read_points(&situation::read_text(&arguments.points)?)?;
            let configured = situation::configured(&arguments.configuration)?;
            tell(&configured.complaints);
            let picture =
                situation::situation(&arguments.folder, &configured, arguments.at.as_deref())?;
            points::points_csv(&picture, &places, &mut out)?;
            DONE
        }
        Command::Decode(arguments) => decode_file(&arguments, &mut out)?,
        Command::Rehearse(arguments) => {
            let now = crate::watch::clock::now();
            rehearse::run(&arguments, now, &mut crate::watch::clock::pause, &mut out)?;
            DONE
        }
    };
    out.flush()?;
    Ok(code)
}

fn decode_file(arguments: &Decode, out: &mut dyn Write) -> anyhow::Result<u8> {
    let path = &arguments.file;
    let folder = path.parent().filter(|parent| !parent.as_os_str().is_empty());
    let folder = folder.unwrap_or_else(|| std::path::Path::new("."));
    let name = path.file_name().map(|name| name.to_string_lossy().into_owned());
    let name = name.with_context(|| format!("{}: a file expected", path.display()))?;
    let bytes = crate::feed::folder::read(folder, &name)?;
    let modified = crate::feed::folder::stamp(path).as_ref().map(Stamp::modified);
    let received = match &arguments.received {
        Some(text) => situation::time(text)?,
        None => received(&name, modified.unwrap_or_default(), None),
    };
    let sound = decode::run(&bytes, &Context { received }, arguments.json, out)?;
    Ok(if sound { DONE } else { FAILED })
}
