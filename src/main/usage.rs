//! What the command line accepts, and what it says about itself.

use std::ffi::OsString;
use std::path::PathBuf;
use std::time::Duration;

use stillgate::handoff::{Notation, plain};
use stillgate::project::{Choices, Form, Method, OutputStyle, Shape};

/// Shown for `--help`.
pub const HELP: &str = "\
stillgate derives asynchronous controllers: from a flow table to proved, hazard-free equations.

  stillgate [FILE]                   the window, on FILE or on a sample
  stillgate check FILE               what is wrong with the table, and what it leaves open
  stillgate derive FILE [options]    the whole design as text
  stillgate compare FILE [options]   every method, form and shape side by side

FILE is a project file in RON. Without options its own choices hold.

  --json              derive: print the record (JSON) instead of text
  --codes METHOD      derive: adjacency, shared-row, single-step, one-hot or multiple-row
  --form FORM         derive: feedback, set-reset or c-element
  --shape SHAPE       derive: sum-of-products or product-of-sums
  --outputs WHOSE     derive, compare: per-cell or per-row
  --covers N          derive: list up to N smallest closed covers
  --notation NAME     derive: equations in textbook, ieee1364 or ieee1076 notation
  --budget SECONDS    derive, compare: stop searching after so many seconds in all
  --help, --version

Without --budget each search has a fixed number of steps, and the same file gives the same result
everywhere. Ctrl-C ends the searches and prints the best so far; a second one ends the program.

Exit: 0 derived, and the proof holds; 1 an error in the design, or it cannot be derived;
2 wrong usage, or a file that cannot be read. Findings go to standard error.
";

/// What to do.
#[derive(Debug, PartialEq)]
pub enum Request {
    /// Open the window, on this file or on a sample.
    Window(Option<PathBuf>),
    /// Print this text and end well.
    Print(&'static str),
    /// Findings of a file.
    Check(PathBuf),
    /// A design.
    Derive(PathBuf, Options),
    /// All alternatives.
    Compare(PathBuf, Options),
}

/// Options of a command; what is not given is as the project says.
#[derive(Debug, Default, PartialEq)]
pub struct Options {
    /// Print the record.
    pub json: bool,
    /// Assignment method.
    pub codes: Option<Method>,
    /// Form of the excitation.
    pub form: Option<Form>,
    /// Shape of the functions.
    pub shape: Option<Shape>,
    /// Whose the outputs are.
    pub outputs: Option<OutputStyle>,
    /// Number of smallest covers to list.
    pub covers: Option<usize>,
    /// Notation of equations.
    pub notation: Notation,
    /// Time for all searches together.
    pub budget: Option<Duration>,
}

impl Options {
    /// Puts what is given in the place of the project's own choices.
    pub fn apply(&self, choices: &mut Choices) {
        if let Some(method) = &self.codes {
            choices.codes.method = method.clone();
        }
        choices.logic.form = self.form.unwrap_or(choices.logic.form);
        choices.logic.shape = self.shape.unwrap_or(choices.logic.shape);
        choices.merging.outputs = self.outputs.unwrap_or(choices.merging.outputs);
    }
}

/// Longest time that `--budget` takes, in seconds: a year.
const LONGEST: f64 = 366.0 * 24.0 * 3600.0;
/// Most covers that `--covers` takes.
const MOST_COVERS: usize = 1000;

/// Reads the arguments after the program's name. `Err` is what is wrong, in one line.
pub fn read(arguments: Vec<OsString>) -> Result<Request, String> {
    let mut words = Words(arguments.into_iter());
    let Some(first) = words.0.next() else {
        return Ok(Request::Window(None));
    };
    let command = match first.to_str() {
        Some("--help" | "-h" | "help") => return Ok(Request::Print(HELP)),
        Some("--version" | "-V") => return Ok(Request::Print(VERSION)),
        Some(command @ ("check" | "derive" | "compare")) => command.to_owned(),
        Some("export") => return Err(NO_EXPORT.to_owned()),
        Some(option) if option.starts_with('-') => return Err(unknown("option", option)),
        Some(word) if !word.contains(['.', '/', '\\']) => return Err(unknown("command", word)),
        _ => return window(first, words),
    };
    let mut options = Options::default();
    let mut file: Option<PathBuf> = None;
    let mut only_files = false;
    while let Some(word) = words.0.next() {
        match word.to_str() {
            Some("--") if !only_files => only_files = true,
            Some("--help" | "-h") if !only_files => return Ok(Request::Print(HELP)),
            Some("--version" | "-V") if !only_files => return Ok(Request::Print(VERSION)),
            Some(option) if option.starts_with('-') && option != "-" && !only_files => {
                words.option(&command, option, &mut options)?;
            }
            _ if file.is_none() => file = Some(word.into()),
            _ => {
                let extra = plain(&word.to_string_lossy());
                return Err(format!("one file at a time: {extra} is one too many"));
            }
        }
    }
    let file = file.ok_or_else(|| format!("{command} needs a project file: stillgate {command} FILE"))?;
    Ok(match command.as_str() {
        "check" => Request::Check(file),
        "derive" => Request::Derive(file, options),
        _ => Request::Compare(file, options),
    })
}

/// Shown for `--version`.
const VERSION: &str = concat!("stillgate ", env!("CARGO_PKG_VERSION"), "\n");

const NO_EXPORT: &str =
    "this build cannot export yet; derive FILE prints the design, derive FILE --json the record";

fn window(file: OsString, mut words: Words) -> Result<Request, String> {
    match words.0.next() {
        None => Ok(Request::Window(Some(file.into()))),
        Some(extra) => {
            let extra = plain(&extra.to_string_lossy());
            Err(format!(
                "{extra} is one too many: the window opens on one file, the batch commands come first"
            ))
        }
    }
}

fn unknown(kind: &str, word: &str) -> String {
    format!("unknown {kind} {}; --help lists what there is", plain(word))
}

struct Words(std::vec::IntoIter<OsString>);

impl Words {
    /// Reads one option, as `--name VALUE` or `--name=VALUE`.
    fn option(&mut self, command: &str, text: &str, options: &mut Options) -> Result<(), String> {
        let (name, mut given) = match text.split_once('=') {
            Some((name, value)) => (name, Some(value.to_owned())),
            None => (text, None),
        };
        let allowed: &[&str] = match command {
            "derive" => {
                &["--json", "--codes", "--form", "--shape", "--outputs", "--covers", "--notation", "--budget"]
            }
            "compare" => &["--outputs", "--budget"],
            _ => &[],
        };
        if !allowed.contains(&name) {
            return Err(match Self::known(name) {
                true => format!("{command} takes no {name}; --help lists what there is"),
                false => unknown("option", name),
            });
        }
        let mut value = || match given.take() {
            Some(value) => Ok(value),
            None => match self.0.next().map(OsString::into_string) {
                Some(Ok(value)) => Ok(value),
                Some(Err(_)) => Err(format!("the value of {name} is not readable text")),
                None => Err(format!("{name} needs a value")),
            },
        };
        match name {
            "--codes" => {
                let all = Method::ALL.map(|m| (dashed(m.word()), m));
                options.codes = Some(one_of(name, &value()?, &all)?);
            }
            "--form" => {
                let all = Form::ALL.map(|f| (dashed(f.word()), f));
                options.form = Some(one_of(name, &value()?, &all)?);
            }
            "--shape" => {
                let all = Shape::ALL.map(|s| (dashed(s.word()), s));
                options.shape = Some(one_of(name, &value()?, &all)?);
            }
            "--outputs" => {
                let all = [("per-cell", OutputStyle::PerCell), ("per-row", OutputStyle::PerRow)];
                let all = all.map(|(word, style)| (word.to_owned(), style));
                options.outputs = Some(one_of(name, &value()?, &all)?);
            }
            "--notation" => {
                let all = Notation::ALL.map(|n| (n.word().to_owned(), n));
                options.notation = one_of(name, &value()?, &all)?;
            }
            "--covers" => {
                let text = value()?;
                let number = text.parse().ok().filter(|n| (1..=MOST_COVERS).contains(n));
                let wrong =
                    || format!("--covers takes a number from 1 to {MOST_COVERS}, not {}", plain(&text));
                options.covers = Some(number.ok_or_else(wrong)?);
            }
            "--budget" => {
                let text = value()?;
                let seconds: Option<f64> = text.parse().ok().filter(|s| (0.0..=LONGEST).contains(s));
                let wrong = || format!("--budget takes seconds from 0 to {LONGEST}, not {}", plain(&text));
                options.budget = Some(Duration::from_secs_f64(seconds.ok_or_else(wrong)?));
            }
            _ => options.json = true,
        }
        match given {
            Some(_) if name == "--json" => Err("--json takes no value".to_owned()),
            _ => Ok(()),
        }
    }

    fn known(name: &str) -> bool {
        HELP.lines().any(|line| line.split_whitespace().next() == Some(name))
    }
}

/// A word of the record as a word of the command line.
fn dashed(word: &str) -> String {
    word.replace('_', "-")
}

fn one_of<T: Clone>(option: &str, word: &str, all: &[(String, T)]) -> Result<T, String> {
    all.iter().find(|(name, _)| name == word).map(|(_, value)| value.clone()).ok_or_else(|| {
        let names: Vec<&str> = all.iter().map(|(name, _)| name.as_str()).collect();
        format!("{option} takes one of {}, not {}", names.join(", "), plain(word))
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn given(words: &[&str]) -> Result<Request, String> {
        read(words.iter().map(OsString::from).collect())
    }

    #[test]
    fn commands_and_options() {
        assert_eq!(given(&["check", "a.ron"]), Ok(Request::Check("a.ron".into())));
        assert_eq!(given(&[]), Ok(Request::Window(None)));
        assert_eq!(given(&["a.ron"]), Ok(Request::Window(Some("a.ron".into()))));
        let Ok(Request::Derive(file, options)) = given(&[
            "derive",
            "--codes=one-hot",
            "a.ron",
            "--form",
            "c-element",
            "--json",
            "--budget",
            "0.5",
        ]) else {
            panic!("not read");
        };
        assert_eq!(file, PathBuf::from("a.ron"));
        assert_eq!(options.codes, Some(Method::OneHot));
        assert_eq!(options.form, Some(Form::CElement));
        assert_eq!(options.budget, Some(Duration::from_millis(500)));
        assert!(options.json && options.shape.is_none());
        assert_eq!(given(&["check", "--", "--json"]), Ok(Request::Check("--json".into())));
    }

    #[test]
    fn what_is_wrong_is_said() {
        for (words, part) in [
            (&["a.ron", "derive"][..], "one too many"),
            (&["export", "a.ron"], "cannot export yet"),
            (&["draw"], "unknown command draw"),
            (&["--fast"], "unknown option --fast"),
            (&["derive"], "needs a project file"),
            (&["derive", "a", "b"], "one too many"),
            (&["derive", "a", "--codes"], "needs a value"),
            (&["derive", "a", "--codes", "gray"], "adjacency, shared-row"),
            (&["derive", "a", "--json=1"], "takes no value"),
            (&["derive", "a", "--budget", "-1"], "seconds"),
            (&["derive", "a", "--budget", "nan"], "seconds"),
            (&["derive", "a", "--covers", "0"], "from 1"),
            (&["check", "a", "--json"], "takes no --json"),
            (&["check", "a", "--what"], "unknown option"),
        ] {
            match given(words) {
                Err(text) => assert!(text.contains(part) && !text.contains('\n'), "{words:?}: {text}"),
                Ok(request) => panic!("{words:?} was read as {request:?}"),
            }
        }
    }
}
