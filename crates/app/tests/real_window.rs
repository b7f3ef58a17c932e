//! The real program in a real window: started under a virtual X server, typed into, exported from. Skipped with a
//! note where Xvfb or xdotool is not installed.

use std::io::{BufRead as _, BufReader};
use std::path::Path;
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

/// A process that ends with the test.
struct Running(Child);

impl Drop for Running {
    fn drop(&mut self) {
        let _ = self.0.kill();
        let _ = self.0.wait();
    }
}

fn installed(program: &str) -> bool {
    let paths = std::env::var_os("PATH").unwrap_or_default();
    std::env::split_paths(&paths).any(|folder| folder.join(program).is_file())
}

/// Starts an X server on a display of its own choice and returns the display's name.
fn display() -> (Running, String) {
    let server = Command::new("Xvfb")
        .args(["-displayfd", "1", "-screen", "0", "1400x900x24", "-nolisten", "tcp"])
        .stdout(Stdio::piped())
        .stderr(Stdio::null())
        .spawn()
        .expect("Xvfb starts");
    let mut server = Running(server);
    let output = server.0.stdout.take().expect("piped");
    let (sender, receiver) = std::sync::mpsc::channel();
    std::thread::spawn(move || {
        let mut line = String::new();
        let _ = BufReader::new(output).read_line(&mut line);
        let _ = sender.send(line);
    });
    let line = receiver.recv_timeout(Duration::from_secs(6)).expect("Xvfb names its display");
    (server, format!(":{}", line.trim()))
}

/// Runs xdotool and returns what it printed; an error counts as nothing printed.
fn xdotool(display: &str, arguments: &[&str]) -> String {
    let output =
        Command::new("xdotool").env("DISPLAY", display).args(arguments).output().expect("xdotool runs");
    String::from_utf8_lossy(&output.stdout).trim().to_owned()
}

/// Asks again until there is an answer, at most until `end`.
fn wait_for<T>(end: Instant, what: &str, mut look: impl FnMut() -> Option<T>) -> T {
    loop {
        if let Some(found) = look() {
            return found;
        }
        assert!(Instant::now() < end, "waited too long for {what}");
        std::thread::sleep(Duration::from_millis(100));
    }
}

/// Presses keys one after the other, with a pause after each so that a slow machine keeps up.
fn press(display: &str, keys: &[&str]) {
    for key in keys {
        xdotool(display, &["key", "--clearmodifiers", key]);
        std::thread::sleep(Duration::from_millis(350));
    }
}

/// A file that exists and is not being written any more.
fn whole(path: &Path) -> Option<Vec<u8>> {
    std::fs::read(path).ok().filter(|bytes| !bytes.is_empty())
}

#[test]
fn an_n_is_typed_the_page_exported_and_the_plan_saved() {
    if !installed("Xvfb") || !installed("xdotool") {
        println!("skipped: needs Xvfb and xdotool");
        return;
    }
    let end = Instant::now() + Duration::from_secs(19);
    let folder = tempfile::tempdir().expect("a folder");
    let scenario = folder.path().join("no-shows.json");
    std::fs::write(&scenario, include_str!("../../../scenarios/no-shows.json")).expect("written");
    let (_server, display) = display();
    let program = Command::new(env!("CARGO_BIN_EXE_gaussgap"))
        .args(["open", "no-shows.json", "--renderer", "cpu"])
        .current_dir(folder.path())
        .env("DISPLAY", &display)
        .env_remove("WAYLAND_DISPLAY")
        .env_remove("WAYLAND_SOCKET")
        .env("XDG_STATE_HOME", folder.path().join("session"))
        .stdout(Stdio::null())
        .stderr(Stdio::null())
        .spawn()
        .expect("the program starts");
    let mut program = Running(program);
    let window = wait_for(end, "the window", || {
        let found = xdotool(&display, &["search", "--onlyvisible", "--name", "Gaussgap"]);
        found.lines().last().map(str::to_owned)
    });
    xdotool(&display, &["windowfocus", "--sync", &window]);
    std::thread::sleep(Duration::from_millis(500));

    press(&display, &["ctrl+g"]);
    xdotool(&display, &["type", "--delay", "60", "345"]);
    std::thread::sleep(Duration::from_millis(900));

    // The dialog proposes a path beside the scenario; Enter takes it.
    let picture = folder.path().join("no-shows.png");
    press(&display, &["ctrl+e", "Return"]);
    let bytes = wait_for(end, "the picture", || whole(&picture));
    assert_eq!(&bytes[..8], b"\x89PNG\r\n\x1a\n");
    let size = |at: usize| u32::from_be_bytes([bytes[at], bytes[at + 1], bytes[at + 2], bytes[at + 3]]);
    let (width, height) = (size(16), size(20));
    assert!(width >= 1000 && height >= 600, "{width}×{height}");
    let colours = colours(&bytes);
    assert!(colours > 100, "text, lines and marks leave many colours, not {colours}");

    // What was typed is what is saved.
    press(&display, &["ctrl+s"]);
    let saved = wait_for(end, "the saved plan", || {
        let text = std::fs::read_to_string(&scenario).ok()?;
        text.contains("345").then_some(text)
    });
    let plan = gaussgap_conclusions::scenario::Scenario::parse(&saved).expect("a scenario");
    assert_eq!(plan.source.total(), 345);

    assert!(program.0.try_wait().expect("asked").is_none(), "the program still runs");
}

/// How many different colours a picture has.
fn colours(png: &[u8]) -> usize {
    let mut reader = png::Decoder::new(std::io::Cursor::new(png)).read_info().expect("a PNG");
    let mut dots = vec![0; reader.output_buffer_size().expect("a size that fits")];
    let info = reader.next_frame(&mut dots).expect("a whole picture");
    let each = info.color_type.samples();
    let seen: std::collections::HashSet<&[u8]> = dots[..info.buffer_size()].chunks(each).collect();
    seen.len()
}
