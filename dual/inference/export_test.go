package inference

var Half = half
