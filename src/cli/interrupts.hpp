#pragma once

namespace trotline {

/// From now on SIGINT, SIGTERM and SIGHUP remove what is half-made and end the process with 128 plus the
/// signal. To be called once, before any thread is started.
void clean_up_when_stopped();

}  // namespace trotline
