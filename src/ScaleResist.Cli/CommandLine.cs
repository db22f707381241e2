// From a command line to the verb it asks for. Values stay text here: what they mean, and every message about it, is the verb's affair.

using ScaleResist.Cli.Commands;
using ScaleResist.Graphs;

namespace ScaleResist.Cli;

/// <summary>Parses a command line and runs what it asks for.</summary>
internal static class CommandLine
{
    private const string Start = "write scaleresist estimate NETWORK --lake DIR, or see scaleresist --help";
    private static readonly string[] Verbs = ["estimate", "survey", "tune", "impact", "distances"];

    // Verbs of the contract that later versions bring.
    private static readonly string[] LaterVerbs = ["lookup", "drift", "merge"];

    /// <summary>Runs a command line.</summary>
    /// <returns>The exit code.</returns>
    public static int Run(string[] args, CliHost host, CancellationToken interrupted)
    {
        if (args.Length == 0)
            return Refuse(host, "no verb is given; " + Start);
        if (args[0] is "--version")
        {
            string commit = ProgramVersion.Commit is string known ? $" ({known})" : "";
            host.Out.WriteLine($"scaleresist {ProgramVersion.Number}{commit}");
            return ExitCode.Done;
        }
        if (args[0] is "--help" or "-h" or "-?" or "help")
        {
            host.Out.Write(HelpText.Program);
            return ExitCode.Done;
        }
        if (!Verbs.Contains(args[0]))
            return Refuse(host, UnknownVerb(args[0]));
        if (args.Skip(1).Any(a => a is "--help" or "-h" or "-?"))
        {
            host.Out.Write(args[0] switch
            {
                "survey" => HelpText.Survey,
                "tune" => HelpText.Tune,
                "impact" => HelpText.Impact,
                "distances" => HelpText.Distances,
                _ => HelpText.Estimate,
            });
            return ExitCode.Done;
        }
        return args[0] switch
        {
            "survey" => Survey(args[1..], host, interrupted),
            "tune" => Tune(args[1..], host, interrupted),
            "impact" => Impact(args[1..], host, interrupted),
            "distances" => Distances(args[1..], host, interrupted),
            _ => Estimate(args[1..], host, interrupted),
        };
    }

    /// <summary>Prints the one line of a refused command.</summary>
    public static int Refuse(CliHost host, string problem)
    {
        host.Error.WriteLine($"scaleresist: {problem.ReplaceLineEndings(" ")}");
        return ExitCode.CommandLine;
    }

    private static int Estimate(string[] words, CliHost host, CancellationToken interrupted)
    {
        EstimateRequest? request = EstimateOptions.Parse(words, out string problem) is EstimateOptions options
            ? EstimateValidation.Validate(options, host.Time.GetUtcNow(), out problem)
            : null;
        return request is null ? Refuse(host, problem) : new EstimateCommand(host).Run(request, interrupted);
    }

    private static int Survey(string[] words, CliHost host, CancellationToken interrupted)
    {
        SurveyRequest? request = SurveyRequest.Parse(words, out string problem);
        return request is null ? Refuse(host, problem) : new SurveyCommand(host).Run(request, interrupted);
    }

    private static int Impact(string[] words, CliHost host, CancellationToken interrupted)
    {
        ImpactRequest? request = ImpactRequest.Parse(words, host.Time.GetUtcNow(), out string problem);
        return request is null ? Refuse(host, problem) : new ImpactCommand(host).Run(request, interrupted);
    }

    private static int Distances(string[] words, CliHost host, CancellationToken interrupted)
    {
        DistancesRequest? request = DistancesRequest.Parse(words, host.Time.GetUtcNow(), out string problem);
        return request is null ? Refuse(host, problem) : new DistancesCommand(host).Run(request, interrupted);
    }

    private static int Tune(string[] words, CliHost host, CancellationToken interrupted)
    {
        TuneRequest? request = TuneRequest.Parse(words, host.Time.GetUtcNow(), out string problem);
        return request is null ? Refuse(host, problem) : new TuneCommand(host).Run(request, interrupted);
    }

    private static string UnknownVerb(string verb)
    {
        string shown = InputException.Show(verb);
        if (LaterVerbs.Contains(verb))
            return $"'{shown}' is not in this version; it has: {string.Join(", ", Verbs)}";
        if (verb.StartsWith('-'))
            return $"unknown option '{shown}' before the verb; {Start}";
        return Suggestion.For(verb, [.. LaterVerbs, .. Verbs]) is string near
            ? $"unknown verb '{shown}'; did you mean {near}?"
            : $"unknown verb '{shown}'; {Start}";
    }
}
