//! The program end to end: every verb, exit status, what goes where.

use assert_cmd::Command;
use serde_json::Value;
use std::path::{Path, PathBuf};

fn stillwarm() -> Command {
    let mut command = Command::cargo_bin("stillwarm").expect("the binary is built");
    command.current_dir(env!("CARGO_MANIFEST_DIR")).env("NO_COLOR", "1");
    command
}

const BRANCH: &str = "cases/water-branch-outage.toml";

fn stdout(command: &mut Command) -> String {
    String::from_utf8(command.assert().success().get_output().stdout.clone()).unwrap()
}

fn json(arguments: &[&str]) -> Value {
    serde_json::from_str(&stdout(stillwarm().args(arguments).args(["--format", "json"]))).unwrap()
}

fn shipped_cases() -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("cases");
    let mut cases: Vec<_> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "toml"))
        .collect();
    cases.sort();
    assert!(cases.len() >= 9);
    cases
}

#[test]
fn the_answer_stands_first_and_alone_on_standard_output() {
    let output = stillwarm().args(["outage", BRANCH]).assert().success().get_output().clone();
    let text = String::from_utf8(output.stdout).unwrap();
    let lines: Vec<&str> = text.lines().collect();
    assert!(lines[0].starts_with("Wash-water branch"), "{text}");
    assert!(lines[2].contains("The power is lost at 0 h."), "{text}");
    assert!(lines[3].contains("Low alarm after 2 h 43 min (cautious: 2 h 12 min)."), "{text}");
    for heading in ["numerical error", "What governs", "What it rests on", "Cautions", "Energy closes to"] {
        assert!(text.contains(heading), "{heading} is missing:\n{text}");
    }
    assert_eq!(String::from_utf8(output.stderr).unwrap(), "");
}

#[test]
fn quiet_says_only_the_answer() {
    let text = stdout(stillwarm().args(["outage", BRANCH, "--quiet", "--quick"]));
    assert!(text.lines().count() <= 8 && !text.contains("Cautions"), "{text}");
    assert!(text.contains("First ice after 4 h 4"), "{text}");
}

#[test]
fn json_has_the_keys_that_others_rely_on() {
    let value = json(&["outage", BRANCH]);
    for key in ["verb", "title", "version", "input_digest", "answers", "start", "energy", "effort"] {
        assert!(!value[key].is_null(), "{key}");
    }
    for key in [
        "name",
        "outcome",
        "time_s",
        "error_s",
        "value",
        "unit",
        "error",
        "where",
        "limit_value",
        "closest_value",
        "closest_error",
        "closest_time_s",
        "cautious_time_s",
    ] {
        assert!(value["answers"][0].get(key).is_some(), "answers[0].{key}");
    }
    for key in ["faces", "content_mean_degC", "heater_w_per_m", "lost_w_per_m", "into_content_w_per_m"] {
        assert!(value["start"].get(key).is_some(), "start.{key}");
    }
    for key in ["supplied_j_per_m", "lost_j_per_m", "stored_j_per_m", "carried_j_per_m", "residual_relative"] {
        assert!(value["energy"][key].is_number(), "energy.{key}");
    }
    for key in ["cells", "steps", "rejected_steps", "newton_iterations"] {
        assert!(value["effort"][key].is_number(), "effort.{key}");
    }
    assert_eq!(value["answers"][1]["name"], "first ice");
    assert_eq!(value["answers"][1]["outcome"], "reached");
    assert!(value["answers"][1]["error_s"].as_f64().unwrap() > 0.0);
    let (answer, cautious) = (&value["answers"][1]["time_s"], &value["answers"][1]["cautious_time_s"]);
    assert!(cautious.as_f64().unwrap() < answer.as_f64().unwrap());
}

#[test]
fn a_value_set_from_the_command_line_is_used_and_told() {
    let plain = json(&["steady", BRANCH, "--quick"]);
    let colder = json(&["steady", BRANCH, "--quick", "--set", "outside.air=-35 degC"]);
    let watts = |value: &Value| value["answers"][0]["value"].as_f64().unwrap();
    // The conductivity of the lagging falls a little with its temperature: not quite 40/30.
    let ratio = watts(&colder) / watts(&plain);
    assert!((1.25..1.3334).contains(&ratio), "{ratio}");
    assert_ne!(plain["input_digest"], colder["input_digest"]);
    assert!(colder["assumptions"].to_string().contains("outside.air=-35 degC"));
}

#[test]
fn every_verb_answers_every_shipped_case() {
    for case in shipped_cases() {
        for verb in ["check", "steady", "run", "outage", "warmup"] {
            let mut command = stillwarm();
            command.arg(verb).arg(&case);
            if verb != "check" {
                command.args(["--quick", "--quiet"]);
            }
            let output = command.assert().get_output().clone();
            let said = String::from_utf8_lossy(&output.stderr).into_owned();
            // Not every question makes sense of every case; where it does not, the reason and a remedy are told.
            match output.status.code() {
                Some(0) => assert!(!output.stdout.is_empty(), "{verb} {case:?}"),
                Some(1) => assert!(said.contains("hint:") || said.contains("no heater"), "{verb} {case:?}: {said}"),
                other => panic!("{verb} {case:?}: status {other:?}: {said}"),
            }
        }
    }
}

#[test]
fn a_report_is_written_whole_and_never_half() {
    let scratch = tempfile::tempdir().unwrap();
    let folder = scratch.path().join("deep/report");
    stillwarm().args(["outage", BRANCH, "--quick", "--quiet", "--out"]).arg(&folder).assert().success();
    let mut names: Vec<String> =
        std::fs::read_dir(&folder).unwrap().map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    assert_eq!(
        names,
        [
            "answer.json",
            "heat-balance.png",
            "heat-balance.svg",
            "histories.png",
            "histories.svg",
            "history.csv",
            "profile.csv",
            "profiles.png",
            "profiles.svg",
            "report.html",
        ]
    );
    let head = std::fs::read_to_string(folder.join("history.csv")).unwrap();
    assert!(
        head.starts_with(
            "time_s,air_degC,centre_degC,content_mean_degC,frozen_fraction,wall_inside_degC,wall_outside_degC,"
        ),
        "{}",
        head.lines().next().unwrap()
    );

    // A file in the way: status 3, a reason, and the file untouched.
    let file = scratch.path().join("taken");
    std::fs::write(&file, "mine").unwrap();
    let output = stillwarm().args(["outage", BRANCH, "--quick", "--quiet", "--out"]).arg(&file).assert().code(3);
    assert!(String::from_utf8_lossy(&output.get_output().stderr).contains("is no folder"));
    assert_eq!(std::fs::read_to_string(&file).unwrap(), "mine");
}

#[test]
fn records_asked_for_are_the_rows() {
    let scratch = tempfile::tempdir().unwrap();
    let folder = scratch.path().join("report");
    stillwarm()
        .args([
            "run",
            BRANCH,
            "--quick",
            "--quiet",
            "--set",
            "run.record=['1 h', '2 h', '4 h']",
            "--set",
            "run.until=4 h",
            "--out",
        ])
        .arg(&folder)
        .assert()
        .success();
    let mut reader = csv::Reader::from_path(folder.join("history.csv")).unwrap();
    let times: Vec<f64> = reader.records().map(|row| row.unwrap()[0].parse().unwrap()).collect();
    assert_eq!(times, [0.0, 3600.0, 7200.0, 14_400.0]);
}

#[test]
fn wrong_input_is_status_2_with_its_place_and_nothing_on_standard_output() {
    for arguments in [
        vec!["outage", "cases/no-such-case.toml"],
        vec!["outage", BRANCH, "--set", "outside.air=-30 W"],
        vec!["outage", BRANCH, "--format", "yaml"],
        vec!["frobnicate"],
        vec!["list", "unobtainium"],
        vec!["new", "somewhere.toml", "--like", "nothing-like-it"],
    ] {
        let output = stillwarm().args(&arguments).assert().code(2).get_output().clone();
        assert!(output.stdout.is_empty(), "{arguments:?}");
        assert!(!output.stderr.is_empty(), "{arguments:?}");
    }
    let said = stillwarm().args(["outage", BRANCH, "--set", "outside.air=-30 W"]).assert().get_output().stderr.clone();
    let said = String::from_utf8(said).unwrap();
    assert!(said.contains("--set") && said.contains("-30 W") && said.contains("degC"), "{said}");
}

#[test]
fn a_question_without_an_answer_is_status_1_and_says_why() {
    let scratch = tempfile::tempdir().unwrap();
    let path = scratch.path().join("bare.toml");
    std::fs::write(
        &path,
        "title = \"bare\"\n[content]\nmaterial = \"heavy fuel oil\"\nstate = \"still\"\n[[layer]]\nname = \"wall\"\n\
         material = \"carbon steel\"\npipe = \"DN 50, schedule 40\"\n[outside]\nair = \"0 degC\"\nfilm = \"10 W/(m2 K)\"\n\
         [start]\ntemperature = \"40 degC\"\n",
    )
    .unwrap();
    for (verb, reason) in [("outage", "names no limit"), ("warmup", "no heater")] {
        let output = stillwarm().arg(verb).arg(&path).assert().code(1).get_output().clone();
        let said = String::from_utf8(output.stderr).unwrap();
        assert!(said.contains(reason), "{said}");
    }
}

#[test]
fn a_new_case_is_sound_and_nothing_is_written_over() {
    let scratch = tempfile::tempdir().unwrap();
    for case in shipped_cases() {
        let name = case.file_stem().unwrap().to_str().unwrap();
        let folder = scratch.path().join(name);
        std::fs::create_dir(&folder).unwrap();
        let path = folder.join("line.toml");
        stillwarm().arg("new").arg(&path).args(["--like", name]).assert().success();
        stillwarm().arg("check").arg(&path).assert().success();
        let before = std::fs::read(&path).unwrap();
        let again = stillwarm().arg("new").arg(&path).args(["--like", name]).assert().code(2);
        assert!(String::from_utf8_lossy(&again.get_output().stderr).contains("exists already"));
        assert_eq!(std::fs::read(&path).unwrap(), before);
    }
}

#[test]
fn lists_come_as_text_and_as_json() {
    assert!(stdout(stillwarm().args(["list", "materials"])).contains("mineral wool"));
    assert!(stdout(stillwarm().args(["list", "DN 80"])).contains("schedule 40"));
    assert!(stdout(stillwarm().args(["list", "cases"])).contains("water-branch-outage"));
    let value: Value = serde_json::from_str(&stdout(stillwarm().args(["list", "water", "--format", "json"]))).unwrap();
    assert!(value.to_string().contains("IAPWS"));
}

#[test]
fn help_and_version_are_answers() {
    let help = stdout(stillwarm().arg("--help"));
    for word in ["outage", "warmup", "steady", "Exit status", "qualified person"] {
        assert!(help.contains(word), "{word}:\n{help}");
    }
    assert!(stdout(stillwarm().arg("--version")).contains(env!("CARGO_PKG_VERSION")));
}

#[test]
fn a_reader_that_goes_away_is_no_panic() {
    let mut child = std::process::Command::new(env!("CARGO_BIN_EXE_stillwarm"))
        .args(["list"])
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .stdout(std::process::Stdio::piped())
        .stderr(std::process::Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let output = child.wait_with_output().unwrap();
    assert!(!String::from_utf8_lossy(&output.stderr).contains("panicked"));
}

#[test]
fn nobody_listening_to_standard_error_is_no_panic() {
    let scratch = tempfile::tempdir().unwrap();
    let mut child = std::process::Command::new(env!("CARGO_BIN_EXE_stillwarm"))
        .args(["outage", BRANCH, "--quick", "--out"])
        .arg(scratch.path().join("report"))
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .stdout(std::process::Stdio::piped())
        .stderr(std::process::Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stderr.take());
    // A panic would be status 101.
    assert_eq!(child.wait_with_output().unwrap().status.code(), Some(0));
}
