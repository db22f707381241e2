// The command as a process of its own, with the fake engine, so that signals, claims and limits can be tested on it.
// SCALERESIST_TEST_LINKS links are pushed in batches of 1,000 with SCALERESIST_TEST_PAUSE milliseconds after each.

namespace ScaleResist.Tests.Cli;

internal static class FakeEngineProgram
{
    public static int Main(string[] args)
    {
        int pause = Number("SCALERESIST_TEST_PAUSE");
        FakeEngine engine = new()
        {
            Links = Math.Max(1, Number("SCALERESIST_TEST_LINKS")),
            BatchRows = 1000,
            AfterBatch = token =>
            {
                if (pause > 0)
                    token.WaitHandle.WaitOne(pause);
                token.ThrowIfCancellationRequested();
            },
        };
        return ScaleResist.Cli.Program.RunProcess(args, engine);
    }

    private static int Number(string variable) =>
        int.TryParse(Environment.GetEnvironmentVariable(variable), out int value) ? value : 0;
}
