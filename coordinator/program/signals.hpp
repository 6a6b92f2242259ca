// Ctrl-C and SIGTERM, counted.
#pragma once

namespace holdfast::coordinator {

/// From now on SIGINT and SIGTERM do not end the program, they are counted.
void countSignals();
/// How many came.
int signalsCounted();

}  // namespace holdfast::coordinator
