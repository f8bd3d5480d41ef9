#pragma once

#include "cli/session.hpp"

namespace stillmass::cli {

/// One a command: does the work and gives the exit code (0, or 1 where the recordings do not answer). They throw
/// `Error` and `Stopped`.
int run_check(Session& session);
int run_spectrum(Session& session);
int run_runup(Session& session);
int run_bump(Session& session);
int run_absorber(Session& session);
int run_survey(Session& session);
int run_simulate(Session& session);
int run_manual(Session& session);

}  // namespace stillmass::cli
