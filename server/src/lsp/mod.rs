//! `leastwise lsp`: the language server over standard input and output.

mod abilities;
mod answers;
mod completions;
mod convert;
mod documents;
mod found;
mod frames;
mod outbox;
mod overlay;
mod positions;
mod searches;
mod server;
mod settings;
mod shared;
mod signatures;
mod tokens;
mod transport;
mod worker;

use documents::Documents;
use server::Backend;
use shared::Shared;
use std::io;
use std::sync::Arc;
use std::sync::atomic::Ordering;
use tower_lsp::LspService;

/// Where this environment variable is `1`, tests can have the server panic, and searches take as long as they like.
const TEST_REQUESTS: &str = "LEASTWISE_TEST_REQUESTS";

/// Talks until the client ends the conversation. The exit status: 0 after `shutdown` and `exit`, else 1.
///
/// # Errors
/// Where the server cannot begin.
pub fn run() -> io::Result<u8> {
    // Parsing and formatting recurse on threads of the runtime.
    let runtime = tokio::runtime::Builder::new_multi_thread()
        .worker_threads(2)
        .max_blocking_threads(16)
        .thread_stack_size(worker::STACK)
        .enable_all()
        .build()?;
    let code = runtime.block_on(talk());
    // A read of standard input may never end.
    runtime.shutdown_background();
    Ok(code)
}

async fn talk() -> u8 {
    let (outbox, letters) = outbox::outbox();
    let (searches, orders) = searches::searches();
    let shared = Arc::new(Shared::new(Arc::new(Documents::default()), outbox, searches));
    if let Err(error) = searches::start(orders, shared.clone()) {
        shared.outbox.log(tower_lsp::ls_types::MessageType::ERROR, format!("no thread for searches: {error}"));
    }
    let mut carried = None;
    let builder = LspService::build(|client| {
        carried = Some(tokio::spawn(outbox::carry(letters, client.clone(), shared.clone())));
        Backend::new(client, shared.clone())
    })
    .custom_method("window/workDoneProgress/cancel", Backend::cancel_progress);
    let tests = std::env::var_os(TEST_REQUESTS).is_some_and(|v| v == "1");
    let (service, socket) = if tests {
        let builder = builder.custom_method("leastwise/testPanic", Backend::test_panic);
        builder.custom_method("leastwise/testHold", Backend::test_hold).finish()
    } else {
        builder.finish()
    };
    let end = transport::serve(tokio::io::stdin(), tokio::io::stdout(), service, socket).await;
    shared.stop();
    let polite = end == transport::End::Exit && shared.shut.load(Ordering::Relaxed);
    u8::from(!polite)
}
