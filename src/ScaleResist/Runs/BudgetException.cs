// A plan that does not fit: told before the work starts, with the figures.

namespace ScaleResist.Runs;

/// <summary>The plan does not fit the time or memory budget.</summary>
public sealed class BudgetException(string message) : Exception(message);
