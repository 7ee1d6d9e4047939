#include "interrupts.hpp"

#include <pthread.h>
#include <unistd.h>

#include <csignal>
#include <thread>

#include <trotline/base/files.hpp>

namespace trotline {

void clean_up_when_stopped() {
  sigset_t signals;
  sigemptyset(&signals);
  for (const int signal : {SIGINT, SIGTERM, SIGHUP}) sigaddset(&signals, signal);
  pthread_sigmask(SIG_BLOCK, &signals, nullptr);
  // A thread that waits may remove files, which a signal handler may not.
  std::thread([signals] {
    int signal = 0;
    sigwait(&signals, &signal);
    abandon_output_folders();
    _exit(128 + signal);
  }).detach();
}

}  // namespace trotline
