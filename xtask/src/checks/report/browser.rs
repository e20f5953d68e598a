//! A browser without a window, driven over the pipe that Chromium offers for it.
//!
//! The messages are those of the Chrome DevTools Protocol, one JSON document after the other, each ended by a zero
//! byte. What is typed, turned and touched this way reaches the page as from a person.

use std::fs::{self, File};
use std::io::{self, BufRead, BufReader, Write};
use std::path::{Path, PathBuf};
use std::process::{Child, ChildStdin, Command, Stdio};
use std::sync::mpsc::{Receiver, channel};
use std::thread;
use std::time::{Duration, Instant};

use serde_json::{Value, json};

/// A page that does not answer within this time never will.
const PATIENCE: Duration = Duration::from_secs(60);

/// One browser with one page.
pub(super) struct Browser {
    child: Child,
    to: ChildStdin,
    from: Receiver<Value>,
    session: Option<String>,
    last: u64,
    /// What went wrong in the page since the last look: uncaught errors and messages of the console.
    complaints: Vec<String>,
    loaded: bool,
    log: PathBuf,
}

impl Browser {
    /// Starts Chromium with its files in `folder`.
    pub(super) fn start(folder: &Path) -> Result<Self, String> {
        let told = |error: io::Error| format!("chromium cannot be started: {error}");
        let log = folder.join("chromium.log");
        let profile = folder.join("profile");
        fs::create_dir_all(&profile).map_err(told)?;
        // The pipe is on the descriptors 3 and 4; the shell puts there what it has as input and output.
        let mut child = Command::new("sh")
            .args(["-c", "exec chromium \"$@\" 3<&0 4>&1 </dev/null >/dev/null", "chromium"])
            .args([
                "--headless=new",
                "--no-sandbox",
                "--disable-gpu",
                "--remote-debugging-pipe",
                "--hide-scrollbars",
            ])
            .args(["--no-first-run", "--disable-extensions", "--disable-background-networking"])
            .arg(format!("--user-data-dir={}", profile.display()))
            .arg("about:blank")
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(File::create(&log).map_err(told)?)
            .spawn()
            .map_err(told)?;
        let (Some(to), Some(out)) = (child.stdin.take(), child.stdout.take()) else {
            return Err("chromium has no pipe".to_owned());
        };
        let (sender, from) = channel();
        thread::spawn(move || {
            let mut reader = BufReader::new(out);
            let mut message = Vec::new();
            while reader.read_until(0, &mut message).is_ok_and(|read| read > 0) {
                message.pop();
                let Ok(value) = serde_json::from_slice(&message) else { break };
                if sender.send(value).is_err() {
                    break;
                }
                message.clear();
            }
        });
        let mut browser =
            Self { child, to, from, session: None, last: 0, complaints: Vec::new(), loaded: false, log };
        browser.attach()?;
        Ok(browser)
    }

    fn attach(&mut self) -> Result<(), String> {
        let target = self.call("Target.createTarget", &json!({ "url": "about:blank" }))?;
        let wanted = json!({ "targetId": target["targetId"], "flatten": true });
        let session = self.call("Target.attachToTarget", &wanted)?;
        self.session = session["sessionId"].as_str().map(str::to_owned);
        for domain in ["Page", "Runtime", "Log"] {
            self.call(&format!("{domain}.enable"), &json!({}))?;
        }
        Ok(())
    }

    /// Asks for something and waits for the answer.
    pub(super) fn call(&mut self, method: &str, parameters: &Value) -> Result<Value, String> {
        self.last += 1;
        let mut message = json!({ "id": self.last, "method": method, "params": parameters });
        if let Some(session) = &self.session {
            message["sessionId"] = json!(session);
        }
        let mut bytes = message.to_string().into_bytes();
        bytes.push(0);
        self.to
            .write_all(&bytes)
            .and_then(|()| self.to.flush())
            .map_err(|error| self.lost(method, &error.to_string()))?;
        let until = Instant::now() + PATIENCE;
        loop {
            let answer = self.next(until).map_err(|reason| self.lost(method, &reason))?;
            if answer["id"].as_u64() == Some(self.last) {
                return match answer.get("error") {
                    Some(error) => Err(format!("{method}: {error}")),
                    None => Ok(answer["result"].clone()),
                };
            }
        }
    }

    fn next(&mut self, until: Instant) -> Result<Value, String> {
        let left = until.saturating_duration_since(Instant::now());
        let message = self.from.recv_timeout(left).map_err(|error| error.to_string())?;
        match message["method"].as_str() {
            Some("Runtime.exceptionThrown") => {
                let details = &message["params"]["exceptionDetails"];
                let what = details["exception"]["description"].as_str().or(details["text"].as_str());
                self.complaints.push(what.unwrap_or("an uncaught error").to_owned());
            }
            Some("Runtime.consoleAPICalled") => {
                self.complaints.push(format!("console: {}", message["params"]["args"]));
            }
            Some("Log.entryAdded") => {
                self.complaints.push(format!("log: {}", message["params"]["entry"]["text"]));
            }
            Some("Page.loadEventFired") => self.loaded = true,
            _ => {}
        }
        Ok(message)
    }

    fn lost(&self, method: &str, reason: &str) -> String {
        let log = fs::read_to_string(&self.log).unwrap_or_default();
        let last: Vec<&str> = log.lines().rev().take(3).collect();
        format!("chromium does not answer {method} ({reason}); the end of its log: {}", last.join(" | "))
    }

    /// Opens a file and waits until it is there.
    pub(super) fn open(&mut self, file: &Path) -> Result<(), String> {
        self.loaded = false;
        self.complaints.clear();
        self.call("Page.navigate", &json!({ "url": format!("file://{}", file.display()) }))?;
        let until = Instant::now() + PATIENCE;
        while !self.loaded {
            self.next(until).map_err(|reason| self.lost("Page.loadEventFired", &reason))?;
        }
        Ok(())
    }

    /// The value of an expression in the page.
    pub(super) fn evaluate(&mut self, expression: &str) -> Result<Value, String> {
        let wanted = json!({ "expression": expression, "returnByValue": true, "awaitPromise": true });
        let answer = self.call("Runtime.evaluate", &wanted)?;
        match answer.get("exceptionDetails") {
            Some(details) => Err(format!("{expression}: {details}")),
            None => Ok(answer["result"]["value"].clone()),
        }
    }

    /// Everything that the page complained of since it was opened.
    pub(super) fn complaints(&mut self) -> Vec<String> {
        std::mem::take(&mut self.complaints)
    }
}

impl Drop for Browser {
    fn drop(&mut self) {
        self.session = None;
        // It ends by itself when asked; only if it does not, it is ended.
        if self.call("Browser.close", &json!({})).is_err() {
            drop(self.child.kill());
        }
        drop(self.child.wait());
    }
}
