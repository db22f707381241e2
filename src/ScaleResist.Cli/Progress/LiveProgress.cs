// Progress for people: one live bar a phase, on a terminal. Colours go by NO_COLOR and the terminal.

using ScaleResist.Cli.Report;
using ScaleResist.Runs;
using Spectre.Console;

namespace ScaleResist.Cli.Progress;

/// <summary>Draws bars while work runs.</summary>
internal sealed class LiveProgress : IRunObserver
{
    private readonly ProgressContext context;
    private readonly Dictionary<string, ProgressTask> tasks = [];
    private readonly Lock gate = new();
    private ProgressTask? current;

    private LiveProgress(ProgressContext context) => this.context = context;

    /// <summary>Runs work that reports to bars on a terminal.</summary>
    public static void Follow(TextWriter terminal, Action<IRunObserver> work)
    {
        IAnsiConsole console = AnsiConsole.Create(new AnsiConsoleSettings
        {
            Out = new AnsiConsoleOutput(terminal),
            Ansi = AnsiSupport.Yes,
            Interactive = InteractionSupport.Yes,
            ColorSystem = string.IsNullOrEmpty(Environment.GetEnvironmentVariable("NO_COLOR"))
                ? ColorSystemSupport.Detect
                : ColorSystemSupport.NoColors,
        });
        console.Progress()
            .Columns(new TaskDescriptionColumn { Alignment = Justify.Left }, new ProgressBarColumn(), new PercentageColumn(),
                new RemainingTimeColumn())
            .Start(context => work(new LiveProgress(context)));
    }

    public void Begin(string phase, double? total, string unit)
    {
        lock (gate)
        {
            End();
            string description = Markup.Escape(total is double all ? $"{phase} {Numbers.Amount(all, unit)}" : phase);
            if (tasks.TryGetValue(phase, out ProgressTask? known))
            {
                known.Description = description;
                known.Value = 0;
            }
            else
            {
                tasks[phase] = known = context.AddTask(description);
            }
            known.MaxValue = total is double most and > 0 ? most : 1;
            known.IsIndeterminate = total is null;
            current = known;
        }
    }

    public void Report(double done)
    {
        lock (gate)
        {
            if (current is { IsIndeterminate: false } task)
                task.Value = Math.Min(done, task.MaxValue);
        }
    }

    public void End()
    {
        lock (gate)
        {
            if (current is not ProgressTask task)
                return;
            task.IsIndeterminate = false;
            task.Value = task.MaxValue;
            current = null;
        }
    }
}
