using System.Runtime.CompilerServices;

// Reference checks of steps inside the fleet's fit, which the fit as a whole would blur.
[assembly: InternalsVisibleTo("WearWatch.Diagnosis.Tests")]
