//! The command line: what is asked, in which form the answer comes, and the exit status. It computes nothing.
//!
//! | status | meaning |
//! |---|---|
//! | 0 | answered |
//! | 1 | the question has no answer, and why is said |
//! | 2 | the input is wrong |
//! | 3 | the computation failed, with where and why |

use crate::case::{self, Loaded};
use crate::library;
use crate::question::{self, Options, QuestionError, Verb};
use crate::report::{self, json::answer_json, terminal};
use crate::shipped;
use clap::{Args, Parser, Subcommand, ValueEnum};
use indicatif::{ProgressBar, ProgressStyle};
use std::ffi::OsString;
use std::io::{self, IsTerminal, Write};
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::time::Duration;

const AFTER_HELP: &str = "Examples:
  stillwarm new line.toml                      a commented case file to start from
  stillwarm check line.toml                    is it sound?
  stillwarm outage line.toml --out outage      power is lost: when is each limit passed? with report and figures
  stillwarm steady line.toml --set 'outside.air=-30 degC'

Exit status: 0 answered, 1 no answer exists (said why), 2 the input is wrong, 3 the computation failed.
Results are estimates for a qualified person to judge; local codes and the heater's own documents prevail.";

/// Transient answers for electrically heated lines: warm-up, cool-down, first ice, blocked, settled.
#[derive(Debug, Parser)]
#[command(name = "stillwarm", version, about, after_help = AFTER_HELP, max_term_width = 100)]
struct Command {
    #[command(subcommand)]
    verb: Ask,
}

#[derive(Debug, Subcommand)]
enum Ask {
    /// Where does each face sit, where does the heat go, how many watts hold each target?
    Steady(Question),
    /// What happens, hour by hour, under the case's own events?
    Run(Question),
    /// From cold with every heater on: how long until each target is met, and at what energy?
    Warmup(Question),
    /// Power is lost at 0 h: when is each limit passed?
    Outage(Question),
    /// Is the case file sound? Prints every fault with its place and its remedy.
    Check {
        /// The case file.
        case: PathBuf,
        /// Change one value of the case: `outside.air=-30 degC`, `layer.lagging.thickness=80 mm`. May be repeated.
        #[arg(long = "set", value_name = "PATH=VALUE")]
        set: Vec<String>,
    },
    /// Write a commented case file to start from; never over an existing file.
    New {
        /// Where to write it.
        #[arg(default_value = "line.toml")]
        path: PathBuf,
        /// Like which shipped case; without a name that exists, the names are listed.
        #[arg(long, value_name = "CASE", default_value = shipped::DEFAULT)]
        like: String,
    },
    /// The built-in materials and pipe sizes with their sources; or the details of one.
    List {
        /// `materials`, `pipes`, `cases`, or the name of a material or pipe.
        what: Option<String>,
        /// As text, or as JSON.
        #[arg(long, value_enum, default_value_t = Format::Text)]
        format: Format,
    },
}

#[derive(Debug, Args)]
struct Question {
    /// The case file.
    case: PathBuf,
    /// Change one value of the case: `outside.air=-30 degC`, `layer.lagging.thickness=80 mm`. May be repeated.
    #[arg(long = "set", value_name = "PATH=VALUE")]
    set: Vec<String>,
    /// Write answer.json, tables, figures and report.html into this folder.
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Show the report when it is written (into a temporary folder without --out).
    #[arg(long)]
    open: bool,
    /// What stands on standard output: text, or the same answer as JSON.
    #[arg(long, value_enum, default_value_t = Format::Text)]
    format: Format,
    /// Say only the answer: no tables, no progress, no warnings.
    #[arg(long, short)]
    quiet: bool,
    /// Solve once only: faster, without the numerical error and the cautious answer.
    #[arg(long)]
    quick: bool,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum Format {
    Text,
    Json,
}

/// How a command failed.
enum Failure {
    /// The input is wrong: said already, or here.
    Input(String),
    /// The question has no answer.
    Unanswered(String),
    /// The computation, or writing its result, failed.
    Computation(String),
}

impl Failure {
    fn status(&self) -> u8 {
        match self {
            Failure::Unanswered(_) => 1,
            Failure::Input(_) => 2,
            Failure::Computation(_) => 3,
        }
    }

    fn text(&self) -> &str {
        match self {
            Failure::Input(text) | Failure::Unanswered(text) | Failure::Computation(text) => text,
        }
    }
}

/// Runs a command line and gives the exit status.
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> ExitCode {
    let command = match Command::try_parse_from(arguments) {
        Ok(command) => command,
        Err(error) => {
            // Help and version go to standard output with status 0; mistakes to standard error with 2.
            let _ = error.print();
            return ExitCode::from(u8::try_from(error.exit_code()).unwrap_or(2));
        }
    };
    let outcome = match command.verb {
        Ask::Steady(asked) => answer(Verb::Steady, &asked),
        Ask::Run(asked) => answer(Verb::Run, &asked),
        Ask::Warmup(asked) => answer(Verb::Warmup, &asked),
        Ask::Outage(asked) => answer(Verb::Outage, &asked),
        Ask::Check { case, set } => check(&case, &set),
        Ask::New { path, like } => new(&path, &like),
        Ask::List { what, format } => list(what.as_deref(), format),
    };
    match outcome {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => {
            if !failure.text().is_empty() {
                tell(failure.text());
            }
            ExitCode::from(failure.status())
        }
    }
}

/// Prints to standard output. A reader that has gone away is no failure of ours.
fn print(text: &str) -> Result<(), Failure> {
    let mut out = io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != io::ErrorKind::BrokenPipe => {
            Err(Failure::Computation(format!("cannot write the answer: {error}")))
        }
        _ => Ok(()),
    }
}

/// Says something on standard error; that nobody listens is no failure either (`eprintln!` would panic).
fn tell(text: &str) {
    let _ = writeln!(io::stderr(), "{}", text.trim_end());
}

fn load(path: &Path, set: &[String], quiet: bool) -> Result<Loaded, Failure> {
    let loaded = case::load(path, set).map_err(|faults| Failure::Input(faults.render_for_stderr()))?;
    if !quiet && !loaded.warnings.is_empty() {
        tell(&loaded.warnings.render_for_stderr());
    }
    Ok(loaded)
}

fn answer(verb: Verb, asked: &Question) -> Result<(), Failure> {
    let loaded = load(&asked.case, &asked.set, asked.quiet)?;
    let bar = progress_bar(asked.quiet);
    let options = Options { quick: asked.quick, ..Options::default() };
    let found = question::ask(verb, &loaded, &options, &mut |time_s| {
        bar.set_message(format!("{:.1} h of the line's time", time_s / 3600.0));
        bar.tick();
        true
    });
    bar.finish_and_clear();
    let findings = found.map_err(|error| match error {
        QuestionError::NoAnswer { .. } => Failure::Unanswered(format!("no answer: {error}")),
        other => Failure::Computation(format!("error: {other}\nnothing was written")),
    })?;
    match asked.format {
        Format::Text => print(&terminal::text(&findings, asked.quiet))?,
        Format::Json => {
            let mut text = serde_json::to_string_pretty(&answer_json(&findings)).unwrap_or_default();
            text.push('\n');
            print(&text)?;
        }
    }
    if asked.out.is_some() || asked.open {
        let folder = match &asked.out {
            Some(folder) => folder.clone(),
            None => std::env::temp_dir().join(format!("stillwarm-{}", std::process::id())),
        };
        let written = report::write_folder(&folder, &findings)
            .map_err(|error| Failure::Computation(format!("error: {error}")))?;
        if !asked.quiet {
            tell(&format!("wrote {} files into {}", written.len(), folder.display()));
        }
        if asked.open {
            report::open(&folder.join("report.html"))
                .map_err(|error| Failure::Computation(format!("error: {error}")))?;
        }
    }
    if findings.answered {
        Ok(())
    } else {
        // Why stands in the headline already.
        Err(Failure::Unanswered(String::new()))
    }
}

/// A spinner that shows itself only where somebody watches, and only when a solve takes its time.
fn progress_bar(quiet: bool) -> ProgressBar {
    if quiet || !io::stderr().is_terminal() {
        return ProgressBar::hidden();
    }
    let bar = ProgressBar::new_spinner();
    if let Ok(style) = ProgressStyle::with_template("{spinner} solving, {elapsed} so far: {msg}") {
        bar.set_style(style);
    }
    bar.enable_steady_tick(Duration::from_millis(200));
    bar
}

fn check(path: &Path, set: &[String]) -> Result<(), Failure> {
    let loaded = load(path, set, false)?;
    let section = &loaded.section;
    let mut text = format!("{} is sound: {}", path.display(), report::text::clean(&section.title));
    text.push_str(&format!(
        "\n  {} layers, {} heaters, {} events, {} targets, {} limits\n",
        section.layers.len(),
        section.heaters.len(),
        section.events.len(),
        section.targets.len(),
        section.limits.len()
    ));
    for note in &loaded.notes {
        text.push_str(&format!("  note: {}\n", report::text::clean(note)));
    }
    print(&text)
}

fn new(path: &Path, like: &str) -> Result<(), Failure> {
    let Some(case) = shipped::find(like) else {
        let nearest = crate::faults::nearest(like, shipped::names());
        let hint = nearest.map_or(String::new(), |name| format!("\nhint: did you mean '{name}'?"));
        return Err(Failure::Input(format!(
            "error: no shipped case is called '{like}'\nthere are: {}{hint}",
            shipped::names().collect::<Vec<_>>().join(", ")
        )));
    };
    let written = case.write(path).map_err(|error| Failure::Input(format!("error: {error}")))?;
    for file in &written {
        tell(&format!("wrote {}", file.display()));
    }
    print(&format!("Now: stillwarm check {0}, then stillwarm {1} {0}\n", path.display(), case.verb))
}

fn list(what: Option<&str>, format: Format) -> Result<(), Failure> {
    if what == Some("cases") && format == Format::Text {
        return print(&shipped::list_text());
    }
    let unknown = |error: library::UnknownName| Failure::Input(format!("error: {error}"));
    match format {
        Format::Text => print(&library::list_text(what).map_err(unknown)?),
        Format::Json => {
            let value = library::list_json(what).map_err(unknown)?;
            print(&format!("{}\n", serde_json::to_string_pretty(&value).unwrap_or_default()))
        }
    }
}
