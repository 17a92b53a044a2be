//! Letters through a browser to paper: pages counted, text found, Arabic from right to left.

use std::path::Path;
use std::process::Command;

use super::*;

/// Runs a program and returns what it printed; nothing where it is not there.
fn run(program: &str, args: &[&str]) -> Option<String> {
    let out = Command::new(program).args(args).output().ok()?;
    assert!(
        out.status.success(),
        "{program}: {}",
        String::from_utf8_lossy(&out.stderr)
    );
    Some(String::from_utf8_lossy(&out.stdout).into_owned())
}

fn there(program: &str, ask: &str) -> bool {
    Command::new(program).arg(ask).output().is_ok()
}

/// The words of a page with the left edge of each, in points.
fn words(pdf: &Path, page: usize) -> Vec<(f64, String)> {
    let page = page.to_string();
    let text = run(
        "pdftotext",
        &[
            "-bbox",
            "-f",
            &page,
            "-l",
            &page,
            pdf.to_str().unwrap(),
            "-",
        ],
    )
    .unwrap();
    text.lines()
        .filter_map(|line| {
            let (_, rest) = line.split_once("xMin=\"")?;
            let (x, rest) = rest.split_once('"')?;
            let (_, word) = rest.split_once('>')?;
            Some((x.parse().ok()?, word.split('<').next()?.to_owned()))
        })
        .collect()
}

#[test]
fn forty_letters_print_to_forty_pages() {
    let browser = ["chromium", "chromium-browser", "google-chrome"]
        .into_iter()
        .find(|b| there(b, "--version"));
    let (Some(browser), true) = (browser, there("pdftotext", "-v")) else {
        println!(
            "SKIPPED: no Chromium, or no pdftotext (Debian: chromium poppler-utils fonts-noto-core)"
        );
        return;
    };
    let letters = Letters::with(&[]).unwrap();
    let kinds = [
        LetterKind::Referral,
        LetterKind::ExamForm,
        LetterKind::Urgent,
        LetterKind::Rescreen,
        LetterKind::GlassesAtHome,
        LetterKind::Second,
        LetterKind::Passed,
        LetterKind::Color,
        LetterKind::ToDoctor,
        LetterKind::Referral,
    ];
    let forty: Vec<Letter> = ["en", "es", "ar", "vi"]
        .into_iter()
        .flat_map(|language| kinds.map(|kind| letter(kind, language)))
        .collect();
    let html = letters.print(&forty, &sender()).unwrap();
    let folder = tempfile::tempdir().unwrap();
    let (page, pdf) = (folder.path().join("l.html"), folder.path().join("l.pdf"));
    std::fs::write(&page, html).unwrap();
    run(
        browser,
        &[
            "--headless",
            "--no-sandbox",
            "--disable-gpu",
            "--no-pdf-header-footer",
            &format!(
                "--user-data-dir={}",
                folder.path().join("profile").display()
            ),
            &format!("--print-to-pdf={}", pdf.display()),
            page.to_str().unwrap(),
        ],
    );
    let info = run("pdfinfo", &[pdf.to_str().unwrap()]).unwrap();
    let number = |what: &str| -> f64 {
        let line = info.lines().find(|l| l.starts_with(what)).unwrap();
        line.split_whitespace()
            .nth(if what == "Pages:" { 1 } else { 2 })
            .unwrap()
            .parse()
            .unwrap()
    };
    assert!((number("Pages:") - 40.0).abs() < f64::EPSILON, "{info}");
    let width = number("Page size:");
    for (page, language) in [(1, "en"), (11, "es"), (21, "ar"), (31, "vi")] {
        let on_page = words(&pdf, page);
        let text: Vec<&str> = on_page.iter().map(|(_, w)| w.as_str()).collect();
        assert!(text.contains(&"Okafor"), "{language}: {text:?}");
        assert!(text.contains(&"20/20"), "{language}");
        // A letter begins at the margin of its direction: the longest words of an Arabic page lie
        // right of the middle, those of the others left of it.
        let mean = on_page.iter().map(|(x, _)| x).sum::<f64>() / on_page.len() as f64;
        assert_eq!(
            mean > width / 2.0,
            language == "ar",
            "{language}: {mean} of {width}"
        );
    }
    println!("40 letters on 40 pages by {browser}");
}
