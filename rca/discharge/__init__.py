"""The discharge side: could a bubble stay hot, was there fuel and time to ignite."""
