// A solve that did not reach its tolerance in any setting: the run ends with this rather than with a wrong number.

namespace ScaleResist.Solving;

/// <summary>No setting of the solver reached the tolerance.</summary>
/// <param name="message">One line: what was reached, and what the user can do.</param>
public sealed class SolveException(string message) : Exception(message);
