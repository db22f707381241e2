// The verb `survey`: read, look, tell. Writes no file.

using ScaleResist.Cli.Progress;
using ScaleResist.Cli.Report;

namespace ScaleResist.Cli.Commands;

/// <summary>Runs a validated survey.</summary>
internal sealed class SurveyCommand(CliHost host)
{
    /// <summary>Runs the survey.</summary>
    /// <returns>The exit code; errors of the input are thrown.</returns>
    public int Run(SurveyRequest request, CancellationToken interrupted)
    {
        SurveyOutcome? outcome = null;
        ProgressView.Follow(host, view => outcome = host.Engine.Survey(request, view, interrupted));
        foreach (string line in SurveyText.Of(outcome!, request.Plan))
            host.Out.WriteLine(line);
        return ExitCode.Done;
    }
}
