//! `loopladder scan`: all families of a plan, one record each.

use super::progress::Progress;
use super::{Console, interrupt};
use crate::error::{Error, Result};
use crate::record::{Record, read_all, write_atomically};
use crate::report::export::{Format, Options, export};
use crate::scan::{
    Calculator, Item, Plan, Settings, Shard, State, parse_size, prepare, run as run_scan, show_size, show_time, survey,
};
use std::path::PathBuf;
use std::sync::Arc;
use std::time::Duration;

/// Compute all families of a plan; run again to go on after an interruption
#[derive(clap::Args)]
#[command(after_help = "Example:
  loopladder scan config/first-table.toml --out results --threads 2

A plan is a TOML file:
  output = \"results\"         # or --out
  [[families]]
  lengths = \"4-10\"           # a number, a range, or a list of these
  magnons = [2, 3]           # left out: every M >= 2
  loops = 6                  # a limit; left out: every complete loop
  max_primaries = 20         # larger families are left out
  max_degree = 3             # orbits of higher degree are left out
  parity = \"symmetric\"       # or \"paired\": the other orbits are left out
and at the top: threads, memory, certificates, export = [\"html\", \"csv\"] (tables at the end).

Complete records are kept; damaged ones are moved aside. Several scans may share a directory.
Exit codes: 0 all complete, 1 some families failed, 2 mistake in the plan, 6 cannot store, 7 interrupted.")]
pub struct Arguments {
    /// The plan (TOML)
    plan: PathBuf,
    /// Results directory, in place of the plan's `output`
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Print what would be computed and what it would cost, and compute nothing
    #[arg(long)]
    dry_run: bool,
    /// Threads to use [default: the plan's, or all cores]
    #[arg(long, value_name = "N")]
    threads: Option<usize>,
    /// Memory bound, such as 512M or 2G [default: the plan's, or none]
    #[arg(long, value_name = "SIZE")]
    memory: Option<String>,
    /// Compute only part i of n; all n parts together are the whole plan
    #[arg(long, value_name = "i/n")]
    shard: Option<String>,
    /// Store a certificate for `audit` beside every record
    #[arg(long)]
    certificates: bool,
}

/// Runs `loopladder scan`.
///
/// # Errors
/// A bad plan or option, a directory that cannot be used, failed families, an interruption.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    run_with(arguments, console, Arc::new(crate::scan::Engine))
}

fn run_with(arguments: &Arguments, console: &Console, calculator: Arc<dyn Calculator>) -> Result<()> {
    let plan = Plan::read(&arguments.plan)?;
    let shard = arguments.shard.as_deref().map(str::parse::<Shard>).transpose()?;
    let settings = settings(arguments, &plan)?;
    let items = prepare(&plan, &*calculator, settings.certificates, shard);
    if arguments.dry_run {
        let whole = prepare(&plan, &*calculator, settings.certificates, None);
        return console.result(&preview(arguments, &settings, &items, &whole, shard)?);
    }
    interrupt::listen(Duration::from_secs(5))?;
    let progress = Arc::new(Progress::new(console));
    let summary = run_scan(items, &settings, calculator, Arc::clone(&progress) as _);
    progress.finish();
    let summary = summary?;
    console.result(&summary.text())?;
    if shard.is_none() && !summary.interrupted && summary.storage.is_none() {
        export_tables(&plan, &settings, console)?;
    }
    summary.verdict()
}

/// Writes the tables that the plan asks for, of the plan's families, beside the records.
fn export_tables(plan: &Plan, settings: &Settings, console: &Console) -> Result<()> {
    if plan.export.is_empty() {
        return Ok(());
    }
    let wanted = |record: &Record| {
        plan.tasks.iter().any(|task| (task.family.length, task.family.magnons) == (record.length, record.magnons))
    };
    let records = read_all(&settings.directory)?.into_iter().map(|(_, record)| record).filter(wanted);
    let records: Vec<Record> = records.collect();
    for format in &plan.export {
        let name = match format {
            Format::Latex => "table.tex",
            Format::Markdown => "table.md",
            Format::Csv => "table.csv",
            Format::Json => "table.json",
            Format::Html => "table.html",
        };
        let path = settings.directory.join(name);
        write_atomically(&path, export(&records, *format, &Options::default())?.as_bytes())?;
        console.message(&format!("wrote {}", path.display()));
    }
    Ok(())
}

fn settings(arguments: &Arguments, plan: &Plan) -> Result<Settings> {
    let directory = arguments.out.clone().or_else(|| plan.output.clone()).ok_or_else(|| {
        Error::input(format!(
            "{}: no output directory; add output = \"DIR\" to the plan, or give --out DIR",
            arguments.plan.display()
        ))
    })?;
    if directory.as_os_str().is_empty() {
        return Err(Error::input("--out is empty; name a directory"));
    }
    if directory.exists() && !directory.is_dir() {
        return Err(Error::input(format!(
            "the output directory {} is a file; choose another with --out",
            directory.display()
        )));
    }
    let cores = || std::thread::available_parallelism().map_or(1, usize::from);
    let threads = arguments.threads.or(plan.threads).unwrap_or_else(cores);
    if !(1..=4096).contains(&threads) {
        return Err(Error::input(format!("--threads {threads} is not between 1 and 4096; give the number of cores")));
    }
    let memory = arguments.memory.as_deref().map(parse_size).transpose()?.or(plan.memory);
    Ok(Settings { directory, threads, memory, certificates: arguments.certificates || plan.certificates })
}

/// The table of `--dry-run`.
fn preview(
    arguments: &Arguments,
    settings: &Settings,
    items: &[Item],
    whole: &[Item],
    shard: Option<Shard>,
) -> Result<String> {
    let states = survey(items, settings)?;
    let mut text = format!("plan {}, results in {}\n", arguments.plan.display(), settings.directory.display());
    text.push_str("family     primaries  loops  time on 1 core     memory  state\n");
    let (mut seconds, mut missing) = (0.0, 0);
    for (item, state) in items.iter().zip(&states) {
        let too_much = settings.memory.is_some_and(|limit| item.cost.bytes > limit);
        let words = match state {
            State::Complete => "complete".to_string(),
            State::ToCompute if too_much => "over the memory bound: would be refused".to_string(),
            State::ToCompute if item.task.filter.is_open() => "to compute".to_string(),
            State::ToCompute => "to compute, selected orbits only".to_string(),
            State::Damaged(path) => format!("{} is damaged and would be moved aside", path.display()),
        };
        if *state != State::Complete {
            seconds += item.cost.seconds;
            missing += 1;
        }
        text.push_str(&format!(
            "{:<10} {:>9}  {:>5}  {:>14}  {:>9}  {words}\n",
            item.task.family.to_string(),
            item.task.family.primaries().to_string(),
            item.loops,
            show_time(item.cost.seconds),
            show_size(item.cost.bytes),
        ));
    }
    if let Some(shard) = shard {
        let sum = |items: &[Item]| items.iter().map(|item| item.cost.seconds).sum::<f64>();
        text.push_str(&format!(
            "shard {shard}: {} of {} families, {:.0} % of the estimated time\n",
            items.len(),
            whole.len(),
            100.0 * sum(items) / sum(whole).max(1e-9)
        ));
    }
    let workers = settings.workers();
    text.push_str(&format!(
        "{missing} of {} to compute; estimated time {} on 1 core, {} on {} threads\n",
        items.len(),
        show_time(seconds),
        show_time(seconds / workers as f64),
        workers
    ));
    Ok(text)
}
